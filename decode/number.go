package decode

import (
	"cmp"
	"math"
	"math/big"
	"sort"

	"busloom/bits"
	"busloom/schema"
	"busloom/unit"
)

// From the integer that a kind gives to the physical value, in integers.

// rounding is num = round_half_even((p*x + q) / r), all of it in 64 bits.
type rounding struct {
	p, q, r int64
}

func (o *rounding) of(x int64) int64 { return divHalfEven(x*o.p+o.q, o.r) }

// divHalfEven divides (d above zero), rounding half to even.
func divHalfEven(n, d int64) int64 {
	q, m := n/d, n%d
	if m < 0 {
		q--
		m += d
	}
	if m > d-m || (m == d-m && q&1 != 0) {
		q++
	}
	return q
}

// curve is a curve of an affine, cut into straight pieces of the integer x.
type curve struct {
	pieces []curvePiece
}

type curvePiece struct {
	from int64 // the piece holds from this x on
	rounding
	none bool // beyond a curve that ends
}

func (c *curve) find(x int64) *curvePiece {
	i := sort.Search(len(c.pieces), func(i int) bool { return c.pieces[i].from > x })
	return &c.pieces[max(i-1, 0)]
}

// limits are the least and the greatest integer of a kind and width.
func limits(kind schema.Kind, width int) (low, high *big.Int) {
	one := big.NewInt(1)
	pow := func(n int) *big.Int { return new(big.Int).Lsh(one, uint(n)) }
	switch kind {
	case schema.Signed:
		return new(big.Int).Neg(pow(width - 1)), new(big.Int).Sub(pow(width-1), one)
	case schema.SignMagnitude:
		high = new(big.Int).Sub(pow(width-1), one)
		return new(big.Int).Neg(high), high
	}
	return new(big.Int), new(big.Int).Sub(pow(width), one)
}

// integers makes p, q and r of 10^digits * (a*x + b), with r = 1 if that is
// whole; ok is false if something leaves 63 bits on the way.
func integers(a, b *big.Rat, digits int, low, high *big.Int) (o rounding, ok bool) {
	ten := new(big.Rat).SetInt(new(big.Int).Exp(big.NewInt(10), big.NewInt(int64(digits)), nil))
	x, y := new(big.Rat).Mul(a, ten), new(big.Rat).Mul(b, ten)
	r := new(big.Int).Mul(x.Denom(), y.Denom())
	r.Quo(r, new(big.Int).GCD(nil, nil, x.Denom(), y.Denom()))
	scale := new(big.Rat).SetInt(r)
	p, q := x.Mul(x, scale).Num(), y.Mul(y, scale).Num()
	for _, end := range []*big.Int{low, high} {
		v := new(big.Int).Mul(p, end)
		if v.BitLen() > 62 || v.Add(v, q).BitLen() > 62 {
			return o, false
		}
	}
	if !p.IsInt64() || !q.IsInt64() || q.BitLen() > 62 || r.BitLen() > 61 {
		return o, false
	}
	return rounding{p.Int64(), q.Int64(), r.Int64()}, true
}

// setConversion prepares a number's way from x to text. exact is false if a
// unit conversion had to cut pi short.
func (s *Signal) setConversion(a, b *big.Rat, c *schema.Curve, post *line) {
	low, high := limits(s.kind, s.width)
	if c != nil {
		s.setCurve(a, b, c, post, low, high)
		return
	}
	exact := true
	if post != nil {
		a, b = new(big.Rat).Mul(post.a, a), new(big.Rat).Add(new(big.Rat).Mul(post.a, b), post.b)
		exact = post.exact
	}
	s.line = &line{a: a, b: b, exact: exact}
	da, okA := unit.FiniteDecimals(a)
	db, okB := unit.FiniteDecimals(b)
	s.line.digits = max(da, db)
	if !exact || !okA || !okB {
		s.line.exact = false
		s.line.digits = unit.RoundDigits(new(big.Rat).Abs(a))
	}
	if s.kind == schema.Float || s.line.digits > unit.MaxDecimals {
		return
	}
	if o, ok := integers(a, b, s.line.digits, low, high); ok {
		s.Scaled, s.Decimals, s.Exact, s.round = true, s.line.digits, s.line.exact, &o
	}
}

// setCurve cuts the curve into pieces of x.
func (s *Signal) setCurve(a, b *big.Rat, c *schema.Curve, post *line, low, high *big.Int) {
	lines, ends := curveLines(a, b, c, post)
	resolution := new(big.Rat)
	for _, l := range lines {
		if step := new(big.Rat).Abs(l.a); step.Sign() > 0 && (resolution.Sign() == 0 || step.Cmp(resolution) < 0) {
			resolution = step
		}
	}
	digits := min(unit.RoundDigits(resolution), unit.MaxDecimals)
	out := &curve{}
	for i, l := range lines {
		from := low
		if i > 0 {
			from = ends[i-1]
		}
		if from.Cmp(high) > 0 {
			break
		}
		if i+1 < len(lines) && ends[i].Cmp(from) <= 0 {
			continue // no integer lies on this piece
		}
		if from.Cmp(low) < 0 {
			from = low
		}
		to := high
		if i+1 < len(lines) && ends[i].Cmp(high) < 0 {
			to = ends[i]
		}
		piece := curvePiece{from: from.Int64(), none: l.digits < 0}
		if !piece.none {
			o, ok := integers(l.a, l.b, digits, from, to)
			if !ok || !from.IsInt64() || !high.IsInt64() {
				// Too large for 64 bits: piece by piece in rationals.
				s.line = &line{digits: digits}
				s.pieces, s.starts = lines, ends
				return
			}
			piece.rounding = o
		}
		out.pieces = append(out.pieces, piece)
	}
	s.Scaled, s.Decimals, s.curve = true, digits, out
}

// curveLines gives the straight lines of the curve as functions of the integer
// x, in rising x, and the first integer of each line but the first. A line
// with digits -1 has no value.
func curveLines(a, b *big.Rat, c *schema.Curve, post *line) (lines []line, starts []*big.Int) {
	n := len(c.Points)
	type stretch struct {
		line
		start *big.Rat // in the curve's X; nil for the first
	}
	var all []stretch
	beyond := func(i, j int, at schema.Point) line {
		switch c.Outside {
		case schema.Hold:
			return line{a: new(big.Rat), b: new(big.Rat).Set(at.Y)}
		case schema.None:
			return line{a: new(big.Rat), b: new(big.Rat), digits: -1}
		}
		return through(c.Points[i], c.Points[j])
	}
	all = append(all, stretch{line: beyond(0, 1, c.Points[0])})
	for i := 0; i+1 < n; i++ {
		all = append(all, stretch{through(c.Points[i], c.Points[i+1]), c.Points[i].X})
	}
	// The end's own X still has a value.
	all = append(all, stretch{beyond(n-2, n-1, c.Points[n-1]), c.Points[n-1].X})

	// Substitute X = a*x + b and apply the unit conversion.
	for i := range all {
		l := &all[i].line
		l.b = new(big.Rat).Add(new(big.Rat).Mul(l.a, b), l.b)
		l.a = new(big.Rat).Mul(l.a, a)
		if post != nil {
			l.b = new(big.Rat).Add(new(big.Rat).Mul(post.a, l.b), post.b)
			l.a = new(big.Rat).Mul(post.a, l.a)
		}
	}
	// at is the x at which the curve's X is reached.
	at := func(x *big.Rat) *big.Rat { return new(big.Rat).Quo(new(big.Rat).Sub(x, b), a) }
	if a.Sign() > 0 {
		for i, s := range all {
			lines = append(lines, s.line)
			if i == 0 {
				continue
			}
			start := ceil(at(s.start))
			if i == len(all)-1 {
				start = floor(at(s.start))
				start.Add(start, big.NewInt(1))
			}
			starts = append(starts, start)
		}
		return lines, starts
	}
	for i := len(all) - 1; i >= 0; i-- {
		lines = append(lines, all[i].line)
		if i == 0 {
			break
		}
		// Going down in X, the line above all[i].start ends there; the point
		// itself belongs to the piece inside the curve.
		start := ceil(at(all[i].start))
		if i == 1 {
			start = floor(at(all[i].start))
			start.Add(start, big.NewInt(1))
		}
		starts = append(starts, start)
	}
	return lines, starts
}

func through(p, q schema.Point) line {
	slope := new(big.Rat).Quo(new(big.Rat).Sub(q.Y, p.Y), new(big.Rat).Sub(q.X, p.X))
	return line{a: slope, b: new(big.Rat).Sub(p.Y, new(big.Rat).Mul(slope, p.X))}
}

func floor(r *big.Rat) *big.Int {
	q, _ := new(big.Int).DivMod(r.Num(), r.Denom(), new(big.Int))
	return q
}

func ceil(r *big.Rat) *big.Int {
	return new(big.Int).Neg(floor(new(big.Rat).Neg(r)))
}

// integer is the whole number that a kind makes of raw bits; ok is false for a
// packed decimal digit above 9.
func (s *Signal) integer(raw uint64) (x int64, ok bool) {
	switch s.kind {
	case schema.Signed:
		return bits.SignExtend(raw, s.width), true
	case schema.SignMagnitude:
		return bits.SignMagnitude(raw, s.width), true
	case schema.PackedDecimal:
		v, ok := bits.PackedDecimal(raw, s.width)
		return int64(v), ok
	}
	return int64(raw), true
}

// bigInteger is integer for raw values of 64 bits too.
func (s *Signal) bigInteger(raw uint64) *big.Int {
	switch s.kind {
	case schema.Signed, schema.SignMagnitude, schema.PackedDecimal:
		x, _ := s.integer(raw)
		return big.NewInt(x)
	}
	return new(big.Int).SetUint64(raw)
}

// exactValue is the physical value as a rational; only for numbers.
func (s *Signal) exactValue(v *Value) *big.Rat {
	if s.Scaled {
		den := new(big.Int).Exp(big.NewInt(10), big.NewInt(int64(s.Decimals)), nil)
		return new(big.Rat).SetFrac(big.NewInt(v.Num), den)
	}
	x := new(big.Rat)
	if s.kind == schema.Float {
		x.SetFloat64(bits.Float(v.Raw, s.width))
	} else {
		x.SetInt(s.bigInteger(v.Raw))
	}
	l := s.line
	switch {
	case l == nil:
		return x
	case s.pieces != nil:
		l = s.pieceOf(x.Num())
	}
	return x.Add(x.Mul(x, l.a), l.b)
}

// pieceOf is the straight piece of a curve that is too large for 64 bits.
func (s *Signal) pieceOf(x *big.Int) *line {
	i := 0
	for i < len(s.starts) && s.starts[i].Cmp(x) <= 0 {
		i++
	}
	return &s.pieces[i]
}

// Compare orders two numbers of the signal: -1, 0 or 1.
func (s *Signal) Compare(v, w *Value) int {
	switch {
	case s.Scaled:
		return cmp.Compare(v.Num, w.Num)
	case s.kind == schema.Float:
		// The conversion only rises or only falls.
		return cmp.Compare(bits.Float(v.Raw, s.width), bits.Float(w.Raw, s.width)) * s.line.a.Sign()
	}
	return s.exactValue(v).Cmp(s.exactValue(w))
}

// Difference is |v - w| as text, exactly as far as the values are.
func (s *Signal) Difference(v, w *Value) string {
	d := new(big.Rat).Sub(s.exactValue(v), s.exactValue(w))
	d.Abs(d)
	return s.format(d)
}

// CompareDistance orders |a-b| against |c-d|. For floats the differences are
// those of floating point.
func (s *Signal) CompareDistance(a, b, c, d *Value) int {
	switch {
	case s.Scaled:
		return cmp.Compare(distance(a.Num, b.Num), distance(c.Num, d.Num))
	case s.kind == schema.Float:
		gap := func(v, w *Value) float64 { return math.Abs(bits.Float(v.Raw, s.width) - bits.Float(w.Raw, s.width)) }
		return cmp.Compare(gap(a, b), gap(c, d))
	}
	x := new(big.Rat).Sub(s.exactValue(a), s.exactValue(b))
	y := new(big.Rat).Sub(s.exactValue(c), s.exactValue(d))
	return x.Abs(x).Cmp(y.Abs(y))
}

func distance(a, b int64) uint64 {
	if a < b {
		a, b = b, a
	}
	return uint64(a) - uint64(b)
}

func (s *Signal) format(r *big.Rat) string {
	if s.kind == schema.Float {
		return formatSignificant(r, significant(s.width))
	}
	digits := s.Decimals
	if s.line != nil {
		digits = s.line.digits
	}
	return unit.FormatRat(r, digits)
}

// significant is how many decimal digits tell all floats of a width apart
// (IEEE 754: 5, 9 and 17).
func significant(width int) int {
	switch width {
	case 16:
		return 5
	case 32:
		return 9
	}
	return 17
}

// formatSignificant writes r with n significant digits at most, half to even.
func formatSignificant(r *big.Rat, n int) string {
	if r.Sign() == 0 {
		return "0"
	}
	// The power of ten just above |r|.
	f, _ := new(big.Float).SetRat(new(big.Rat).Abs(r)).Float64()
	magnitude := 0
	if f > 0 && !math.IsInf(f, 0) {
		magnitude = int(math.Floor(math.Log10(f))) + 1
	}
	digits := n - magnitude
	if digits >= 0 {
		return unit.FormatRat(r, digits)
	}
	// Whole numbers longer than n digits: round to a multiple of a power.
	scale := new(big.Int).Exp(big.NewInt(10), big.NewInt(int64(-digits)), nil)
	q := unit.DivRound(r.Num(), new(big.Int).Mul(r.Denom(), scale))
	return q.Mul(q, scale).String()
}

// AppendNumber appends a number exactly; nothing for any other value.
func (s *Signal) AppendNumber(dst []byte, v *Value) []byte {
	if v.State != Number {
		return dst
	}
	if s.Scaled {
		return unit.AppendScaled(dst, v.Num, s.Decimals)
	}
	if s.kind == schema.Float && s.line.isIdentity() {
		return appendFloat(dst, v.Raw, s.width)
	}
	return append(dst, s.format(s.exactValue(v))...)
}

func (l *line) isIdentity() bool {
	return l.b.Sign() == 0 && l.a.IsInt() && l.a.Num().IsInt64() && l.a.Num().Int64() == 1
}
