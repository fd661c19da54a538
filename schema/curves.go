package schema

import (
	"fmt"
	"math/big"
	"slices"

	"busloom/diag"
	"busloom/schema/internal/syntax"
)

// defineCurves checks each curve: known units, at least two points, strictly
// monotone.
func (c *compiler) defineCurves() {
	eachDecl(c, func(src *source, d *syntax.CurveDecl) {
		sym := c.own(src, nsFormula, d.Name)
		if sym == nil {
			return
		}
		curve := &Curve{Name: d.Name.Text, Text: d.Text.Value, Span: d.Name.Span}
		var okFrom, okTo bool
		curve.From, okFrom = c.unit(src, d.From)
		curve.To, okTo = c.unit(src, d.To)
		outside, okOutside := word(outsideWords, d.Outside.Text)
		if !okOutside {
			c.report(diag.BadCurve, d.Outside.Span, fmt.Sprintf("outside %s isn't said of a curve", d.Outside.Text), "write outside hold, outside extend or outside none")
		}
		curve.Outside = outside
		if c.curvePoints(src, d, curve) && okFrom && okTo && okOutside {
			sym.curve = curve
			c.net.Curves = append(c.net.Curves, curve)
		}
	})
}

func (c *compiler) curvePoints(src *source, d *syntax.CurveDecl, curve *Curve) bool {
	points := slices.Clone(d.Points)
	points = slices.DeleteFunc(points, func(p *syntax.CurvePoint) bool { return p.X.Number.Value == nil || p.Y.Number.Value == nil })
	if len(points) != len(d.Points) {
		return false
	}
	for _, p := range points {
		for _, q := range []*syntax.Quantity{&p.X, &p.Y} {
			if q.Unit != nil {
				c.report(diag.BadCurve, q.Span, "the numbers of a curve's points have no units of their own", "leave the unit out: the curve's head has both units")
				return false
			}
			if tooLong(mostBits, q.Number.Value) {
				c.report(diag.TooPrecise, q.Span, fmt.Sprintf("a point needs a number of more than %d bits", mostBits), "write fewer digits")
				return false
			}
		}
	}
	if len(points) < 2 {
		if src.damaged {
			return false // the others may be there
		}
		c.report(diag.BadCurve, d.Name.Span, fmt.Sprintf("the curve %s has %s, a line needs two", d.Name.Text, counted(len(points), "point")), "add points")
		return false
	}
	slices.SortStableFunc(points, func(a, b *syntax.CurvePoint) int { return a.X.Value().Cmp(b.X.Value()) })
	rising := 0
	for i, p := range points {
		curve.Points = append(curve.Points, Point{X: p.X.Value(), Y: p.Y.Value()})
		if i == 0 {
			continue
		}
		before := points[i-1]
		if curve.Points[i].X.Cmp(curve.Points[i-1].X) == 0 {
			c.report(diag.BadCurve, p.Span, fmt.Sprintf("the curve %s has %s %s twice", d.Name.Text, numberText(curve.Points[i].X), d.From.Text), "remove one of the two points").
				Also(before.Span, "the other one")
			return false
		}
		step := curve.Points[i].Y.Cmp(curve.Points[i-1].Y)
		if rising == 0 {
			rising = step
		}
		if step == 0 || step != rising {
			words := map[int]string{1: "rises", -1: "falls", 0: "stays"}
			c.report(diag.BadCurve, p.Span, fmt.Sprintf("the curve %s %s from %s to %s %s and %s to %s %s", d.Name.Text,
				words[rising], numberText(curve.Points[0].X), numberText(curve.Points[i-1].X), d.From.Text, words[step], numberText(curve.Points[i].X), d.From.Text),
				"let it rise or fall all along").Also(before.Span, "the point before")
			return false
		}
	}
	return true
}

// At is the curve's value at x; ok is false beyond the ends of a curve that
// has no value there.
func (c *Curve) At(x *big.Rat) (y *big.Rat, ok bool) {
	last := len(c.Points) - 1
	if x.Cmp(c.Points[0].X) < 0 || x.Cmp(c.Points[last].X) > 0 {
		low := x.Cmp(c.Points[0].X) < 0
		switch {
		case c.Outside == None:
			return nil, false
		case c.Outside == Hold && low:
			return c.Points[0].Y, true
		case c.Outside == Hold:
			return c.Points[last].Y, true
		}
	}
	i, _ := slices.BinarySearchFunc(c.Points, x, func(p Point, x *big.Rat) int { return p.X.Cmp(x) })
	i = min(max(i, 1), last)
	return line(c.Points[i-1].X, c.Points[i-1].Y, c.Points[i].X, c.Points[i].Y, x), true
}

// inverse is the x that gives y: exact, since the curve is monotone. ok is
// false if nothing gives it.
func (c *Curve) inverse(y *big.Rat) (x *big.Rat, ok bool) {
	last := len(c.Points) - 1
	rising := c.Points[last].Y.Cmp(c.Points[0].Y)
	i := 1
	for i < last && c.Points[i].Y.Cmp(y)*rising < 0 {
		i++
	}
	beyond := c.Points[0].Y.Cmp(y)*rising > 0 || c.Points[last].Y.Cmp(y)*rising < 0
	if beyond && c.Outside != Extend {
		return nil, false
	}
	return line(c.Points[i-1].Y, c.Points[i-1].X, c.Points[i].Y, c.Points[i].X, y), true
}

// line is the straight line through two points.
func line(x0, y0, x1, y1, x *big.Rat) *big.Rat {
	slope := new(big.Rat).Quo(new(big.Rat).Sub(y1, y0), new(big.Rat).Sub(x1, x0))
	y := new(big.Rat).Sub(x, x0)
	return y.Add(y.Mul(y, slope), y0)
}

// steepest is the greatest change of y for a change of x by one.
func (c *Curve) steepest() *big.Rat {
	most := new(big.Rat)
	for i := 1; i < len(c.Points); i++ {
		dx := new(big.Rat).Sub(c.Points[i].X, c.Points[i-1].X)
		dy := new(big.Rat).Sub(c.Points[i].Y, c.Points[i-1].Y)
		if dy.Quo(dy.Abs(dy), dx); dy.Cmp(most) > 0 {
			most = dy
		}
	}
	return most
}
