package schema

import (
	"fmt"
	"math"
	"math/big"

	"busloom/bits"
	"busloom/diag"
	"busloom/schema/internal/syntax"
)

// checkValues holds range, tolerance, codes and initial value against what the
// raw bits can say.
func (c *compiler) checkValues(m *member) bool {
	s, t := m.sig, m.tree
	if s.Kind == Counter {
		return true // with its rule, see checkProtection
	}
	ok := true
	if s.Kind.isNumber() && s.Fixed == nil {
		if t.Within != nil {
			ok = c.checkRange(m)
		}
		if t.Tolerance != nil {
			ok = c.checkTolerance(m) && ok
		}
		if allCoded(s) {
			c.report(diag.NothingLeft, t.Name.Span, fmt.Sprintf("every raw value of %s is a code, so it is never a number", s.Name), "leave some raw values free, or use states")
		} else if s.Curve != nil && s.Curve.Outside == None {
			c.checkCurveReach(m)
		}
	}
	if t.Initial != nil && ok {
		ok = c.checkInitial(m)
	}
	return ok
}

// allCoded reports whether the codes cover all raw values.
func allCoded(s *Signal) bool {
	return len(s.Codes) > 0 && covered(rawOfCodes(s.Codes), 0, onesOf(s.Width))
}

func rawOfCodes(codes []Code) []RawRange {
	out := make([]RawRange, len(codes))
	for i, c := range codes {
		out[i] = c.Raw
	}
	return out
}

// covered reports whether sorted ranges cover all of low..high.
func covered(ranges []RawRange, low, high uint64) bool {
	for _, r := range ranges {
		if r.High < low {
			continue
		}
		if r.Low > low {
			return false
		}
		if r.High >= high {
			return true
		}
		low = r.High + 1
	}
	return false
}

// numbers is the range of what the kind makes of raw bits, before the formula.
func numbers(k Kind, width int) (low, high *big.Rat) {
	pow := func(base int64, n int) *big.Rat {
		return new(big.Rat).SetInt(new(big.Int).Exp(big.NewInt(base), big.NewInt(int64(n)), nil))
	}
	one := big.NewRat(1, 1)
	switch k {
	case Signed:
		half := pow(2, width-1)
		return new(big.Rat).Neg(half), new(big.Rat).Sub(half, one)
	case SignMagnitude:
		most := pow(2, width-1)
		most.Sub(most, one)
		return new(big.Rat).Neg(most), most
	case PackedDecimal:
		return new(big.Rat), new(big.Rat).Sub(pow(10, width/4), one)
	case Float:
		// The largest finite number: IEEE 754-2019 table 3.5.
		most := new(big.Rat).SetFloat64(map[int]float64{16: 65504, 32: math.MaxFloat32, 64: math.MaxFloat64}[width])
		return new(big.Rat).Neg(most), most
	}
	return new(big.Rat), new(big.Rat).Sub(pow(2, width), one)
}

// reach is the range of physical values that the raw bits give; low and high
// may be nil where a curve has no value at all.
func reach(s *Signal) (low, high *big.Rat) {
	n0, n1 := numbers(s.Kind, s.Width)
	low, high = s.Affine.at(n0), s.Affine.at(n1)
	if low.Cmp(high) > 0 {
		low, high = high, low
	}
	if s.Curve == nil {
		return low, high
	}
	first, last := s.Curve.Points[0].X, s.Curve.Points[len(s.Curve.Points)-1].X
	if s.Curve.Outside == None {
		if low.Cmp(first) < 0 {
			low = first
		}
		if high.Cmp(last) > 0 {
			high = last
		}
		if low.Cmp(high) > 0 {
			return nil, nil
		}
	}
	low, _ = s.Curve.At(low)
	high, _ = s.Curve.At(high)
	if low.Cmp(high) > 0 {
		low, high = high, low
	}
	return low, high
}

// at is the value of the straight line.
func (a *Affine) at(raw *big.Rat) *big.Rat {
	v := new(big.Rat).Mul(a.A, raw)
	return v.Add(v, a.B)
}

// back is the raw number that gives a value; ok is false if a curve never
// gives it.
func (s *Signal) back(v *big.Rat) (*big.Rat, bool) {
	if s.Curve != nil {
		x, ok := s.Curve.inverse(v)
		if !ok {
			return nil, false
		}
		v = x
	}
	n := new(big.Rat).Sub(v, s.Affine.B)
	return n.Quo(n, s.Affine.A), true
}

func (c *compiler) checkRange(m *member) bool {
	s, w := m.sig, m.tree.Within
	lowQ, highQ := w.Low, w.High
	span := w.Low.Span.To(w.High.Span)
	// One unit holds for both ends; a mistake in it is one of the whole range.
	if lowQ.Unit == nil {
		lowQ.Unit, lowQ.Span = highQ.Unit, span
	}
	if highQ.Unit == nil {
		highQ.Unit, highQ.Span = lowQ.Unit, span
	}
	if lowQ.Number.Value == nil || highQ.Number.Value == nil {
		return false
	}
	low, ok := c.quantity(m.src, lowQ, s.Unit, false, "the range")
	if !ok {
		return false
	}
	high, ok := c.quantity(m.src, highQ, s.Unit, false, "the range")
	if !ok {
		return false
	}
	if tooLong(mostBits, low, high) {
		c.report(diag.TooPrecise, w.Span, fmt.Sprintf("the range needs numbers of more than %d bits", mostBits), "write fewer digits")
		return false
	}
	if low.Cmp(high) > 0 {
		c.report(diag.EmptyRange, span, fmt.Sprintf("the range %s is upside down", span.Text()), "write the lower end first")
		return false
	}
	s.Range = &Range{Low: low, High: high}
	first, last := reach(s)
	if first == nil {
		c.report(diag.RangeUnreachable, w.Span, fmt.Sprintf("no raw value of %s lies on the curve %s", s.Name, s.Curve.Name), "correct the formula or the curve")
		return false
	}
	for _, end := range []struct {
		v    *big.Rat
		q    syntax.Quantity
		span diag.Span
		out  bool
	}{{low, lowQ, w.Low.Span, low.Cmp(first) < 0 || low.Cmp(last) > 0}, {high, highQ, w.High.Span, high.Cmp(first) < 0 || high.Cmp(last) > 0}} {
		if end.out {
			c.report(diag.RangeUnreachable, end.span, fmt.Sprintf("%s of %s gives %s..%s, so %s can't be reached", rawText(s), s.Name, numberText(first), amountText(last, s.Unit), amountText(end.v, s.Unit)),
				"narrow the range, or change factor, offset or width")
			return false
		}
	}
	return c.checkRangeCodes(m)
}

// rawText names the range of raw numbers of a signal.
func rawText(s *Signal) string {
	if s.Kind == Float {
		return fmt.Sprintf("a float of %d bits", s.Width)
	}
	low, high := numbers(s.Kind, s.Width)
	return fmt.Sprintf("raw %s..%s", numberText(low), numberText(high))
}

// checkRangeCodes refuses codes whose raw values would be numbers within the
// range: a reader couldn't tell them apart.
func (c *compiler) checkRangeCodes(m *member) bool {
	s := m.sig
	if len(s.Codes) == 0 {
		return true
	}
	a, okA := s.back(s.Range.Low)
	b, okB := s.back(s.Range.High)
	if !okA || !okB {
		return true
	}
	if a.Cmp(b) > 0 {
		a, b = b, a
	}
	for _, code := range s.Codes {
		for _, r := range codeNumbers(s.Kind, s.Width, code.Raw) {
			if r[0].Cmp(b) > 0 || r[1].Cmp(a) < 0 {
				continue
			}
			at := r[0]
			if at.Cmp(a) < 0 {
				at = ceilRat(a)
				if s.Kind == Float {
					at = a
				}
				if at.Cmp(r[1]) > 0 || at.Cmp(b) > 0 {
					continue
				}
			}
			value := s.Affine.at(at)
			if s.Curve != nil {
				value, _ = s.Curve.At(value)
			}
			name := code.Class.String()
			if code.Name != "" {
				name += " " + code.Name
			}
			c.report(diag.RangeCutByCodes, m.tree.Within.Span, fmt.Sprintf("the code %s (raw %s) would be %s, within the range of %s", name, describeRange(code.Raw), amountText(value, s.Unit), s.Name),
				"narrow the range, or move the code").Also(m.codesSpan(), "the codes")
			return false
		}
	}
	return true
}

func (m *member) codesSpan() diag.Span {
	if m.tree.Table != nil {
		return m.tree.Table.Span
	}
	if m.codes != nil {
		return m.codes.fact.Span
	}
	return m.tree.Name.Span
}

func describeRange(r RawRange) string {
	if r.Low == r.High {
		return fmt.Sprint(r.Low)
	}
	return fmt.Sprintf("%d..%d", r.Low, r.High)
}

func ceilRat(r *big.Rat) *big.Rat {
	q, rest := new(big.Int).DivMod(r.Num(), r.Denom(), new(big.Int))
	if rest.Sign() != 0 {
		q.Add(q, big.NewInt(1))
	}
	return new(big.Rat).SetInt(q)
}

// codeNumbers lists the ranges of numbers that a range of bit patterns would
// be without codes.
func codeNumbers(k Kind, width int, r RawRange) [][2]*big.Rat {
	u := func(v uint64) *big.Rat { return new(big.Rat).SetInt(new(big.Int).SetUint64(v)) }
	i := func(v int64) *big.Rat { return new(big.Rat).SetInt64(v) }
	half := uint64(1) << (width - 1)
	// parts splits at the sign bit.
	var parts []RawRange
	if r.Low < half {
		parts = append(parts, RawRange{r.Low, min(r.High, half-1)})
	}
	if r.High >= half {
		parts = append(parts, RawRange{max(r.Low, half), r.High})
	}
	var out [][2]*big.Rat
	switch k {
	case Signed:
		for _, p := range parts {
			out = append(out, [2]*big.Rat{i(bits.SignExtend(p.Low, width)), i(bits.SignExtend(p.High, width))})
		}
	case SignMagnitude:
		for _, p := range parts {
			a, b := bits.SignMagnitude(p.Low, width), bits.SignMagnitude(p.High, width)
			if a == 0 && b == 0 && p.Low >= half {
				continue // minus zero alone takes no number away
			}
			out = append(out, [2]*big.Rat{i(min(a, b)), i(max(a, b))})
		}
	case PackedDecimal:
		low, okLow := digitsUp(r.Low, width)
		if !okLow || low > r.High {
			return nil
		}
		high := digitsDown(r.High, width)
		a, _ := bits.PackedDecimal(low, width)
		b, _ := bits.PackedDecimal(high, width)
		out = append(out, [2]*big.Rat{u(a), u(b)})
	case Float:
		for _, p := range parts {
			a, b := bits.Float(p.Low, width), bits.Float(p.High, width)
			_, most := numbers(Float, width)
			if math.IsNaN(a) || math.IsInf(a, 0) {
				continue
			}
			ra, rb := new(big.Rat).SetFloat64(a), new(big.Rat).SetFloat64(b)
			if rb == nil { // the pattern goes on beyond the finite numbers
				rb = new(big.Rat).Set(most)
				if p.Low >= half {
					rb.Neg(rb)
				}
			}
			if ra.Cmp(rb) > 0 {
				ra, rb = rb, ra
			}
			out = append(out, [2]*big.Rat{ra, rb})
		}
	default:
		out = append(out, [2]*big.Rat{u(r.Low), u(r.High)})
	}
	return out
}

// digitsUp is the lowest pattern of decimal digits not below raw.
func digitsUp(raw uint64, width int) (uint64, bool) {
	for shift := width - 4; shift >= 0; shift -= 4 {
		if raw>>shift&15 <= 9 {
			continue
		}
		// Up to the next ten of the digit above; all below becomes zero.
		above := raw >> shift >> 4
		v, ok := bits.PackedDecimal(above, width-shift-4)
		if !ok {
			return 0, false
		}
		next, fits := bits.PutPackedDecimal(v+1, width-shift-4)
		return next << shift << 4, fits
	}
	return raw, true
}

// digitsDown is the highest pattern of decimal digits not above raw.
func digitsDown(raw uint64, width int) uint64 {
	for shift := width - 4; shift >= 0; shift -= 4 {
		if raw>>shift&15 > 9 {
			nines := uint64(0x9999999999999999) & (onesOf(shift) | 15<<shift)
			return raw>>shift>>4<<4<<shift | nines
		}
	}
	return raw
}

func (c *compiler) checkTolerance(m *member) bool {
	s, q := m.sig, *m.tree.Tolerance
	if q.Number.Value == nil {
		return false
	}
	tol, ok := c.quantity(m.src, q, s.Unit, true, "the tolerance")
	if !ok {
		return false
	}
	if tol.Sign() <= 0 {
		c.report(diag.CoarseResolution, q.Span, fmt.Sprintf("a tolerance of %s allows nothing", q.Span.Text()), "write the greatest step that is allowed")
		return false
	}
	if tooLong(mostBits, tol) {
		c.report(diag.TooPrecise, q.Span, fmt.Sprintf("the tolerance needs numbers of more than %d bits", mostBits), "write fewer digits")
		return false
	}
	s.Tolerance = tol
	step := new(big.Rat).Abs(s.Affine.A)
	if s.Kind == Float {
		step.Mul(step, floatStep(s))
	}
	if s.Curve != nil {
		step.Mul(step, s.Curve.steepest())
	}
	if step.Cmp(tol) > 0 {
		diff := s.Unit.Difference()
		c.report(diag.CoarseResolution, q.Span, fmt.Sprintf("from one raw value to the next %s changes by %s, more than the tolerance of %s", s.Name, amountText(step, diff), amountText(tol, diff)),
			"use a smaller factor, or more bits")
		return false
	}
	return true
}

// floatStep is the distance of neighbouring floats at the far end of the
// range; without a range nothing is known, and the step counts as zero.
func floatStep(s *Signal) *big.Rat {
	if s.Range == nil || s.Curve != nil {
		return new(big.Rat)
	}
	most := new(big.Rat)
	for _, end := range []*big.Rat{s.Range.Low, s.Range.High} {
		if n, _ := s.back(end); n.Abs(n).Cmp(most) > 0 {
			most = n
		}
	}
	f, _ := most.Float64()
	if f == 0 || math.IsInf(f, 0) {
		return new(big.Rat)
	}
	_, exponent := math.Frexp(f)
	digits := map[int]int{16: 11, 32: 24, 64: 53}[s.Width]
	lowest := map[int]int{16: -24, 32: -149, 64: -1074}[s.Width]
	exponent = max(exponent-digits, lowest)
	step := big.NewRat(1, 1)
	pow := new(big.Int).Lsh(big.NewInt(1), uint(max(exponent, -exponent)))
	if exponent < 0 {
		return step.SetFrac(big.NewInt(1), pow)
	}
	return step.SetInt(pow)
}

// checkCurveReach warns of numbers beyond a curve that has no value there.
func (c *compiler) checkCurveReach(m *member) {
	s := m.sig
	n0, n1 := numbers(s.Kind, s.Width)
	x0, x1 := s.Affine.at(n0), s.Affine.at(n1)
	if x0.Cmp(x1) > 0 {
		x0, x1 = x1, x0
	}
	first, last := s.Curve.Points[0].X, s.Curve.Points[len(s.Curve.Points)-1].X
	if x0.Cmp(first) >= 0 && x1.Cmp(last) <= 0 {
		return
	}
	if s.Kind == Unsigned {
		// Codes at the ends leave fewer numbers.
		inverse := func(x *big.Rat) *big.Rat { n := new(big.Rat).Sub(x, s.Affine.B); return n.Quo(n, s.Affine.A) }
		r0, r1 := inverse(first), inverse(last)
		if r0.Cmp(r1) > 0 {
			r0, r1 = r1, r0
		}
		ranges := rawOfCodes(s.Codes)
		belowOK, aboveOK := true, true
		if low := new(big.Rat).Sub(ceilRat(r0), big.NewRat(1, 1)); low.Sign() >= 0 {
			belowOK = low.Cmp(n1) <= 0 && covered(ranges, 0, low.Num().Uint64())
		}
		up := floorRat(r1)
		up.Add(up, big.NewRat(1, 1))
		if up.Cmp(n1) <= 0 {
			aboveOK = up.Sign() >= 0 && covered(ranges, up.Num().Uint64(), onesOf(s.Width))
		}
		if belowOK && aboveOK {
			return
		}
	}
	c.report(diag.CurveReach, m.tree.Expr.ExprSpan(), fmt.Sprintf("%s gives %s..%s, the curve %s only goes from %s to %s", rawText(s), numberText(x0), amountText(x1, s.Curve.From), s.Curve.Name, numberText(first), amountText(last, s.Curve.From)),
		"say outside hold or outside extend, add points, or make the raw values beyond it codes").Also(s.Curve.Span, "the curve")
}

func floorRat(r *big.Rat) *big.Rat {
	q, _ := new(big.Int).DivMod(r.Num(), r.Denom(), new(big.Int))
	return new(big.Rat).SetInt(q)
}

// checkInitial turns the initial value into raw bits.
func (c *compiler) checkInitial(m *member) bool {
	s, i := m.sig, m.tree.Initial
	if i.Name != nil {
		return c.initialName(m, i.Name)
	}
	q := *i.Quantity
	if q.Number.Value == nil {
		return false
	}
	v, ok := c.quantity(m.src, q, s.Unit, false, "the initial value")
	if !ok {
		return false
	}
	bad := func(problem, remedy string) bool {
		c.report(diag.BadInitial, q.Span, problem, remedy)
		return false
	}
	raw, ok := c.rawOf(s, v, bad)
	if !ok {
		return false
	}
	if code := s.codeAt(raw); code != nil && s.Kind != States {
		return bad(fmt.Sprintf("%s is raw %d, which is the code %s and no number", q.Span.Text(), raw, code.label()), "write another value, or the code's name")
	}
	if s.Kind == States && s.stateAt(raw) == nil && s.codeAt(raw) == nil {
		return bad(fmt.Sprintf("%s has no state %d", s.Name, raw), "write the name of one of its states")
	}
	if s.Range != nil && (v.Cmp(s.Range.Low) < 0 || v.Cmp(s.Range.High) > 0) {
		return bad(fmt.Sprintf("%s is outside the range %s..%s of %s", q.Span.Text(), numberText(s.Range.Low), amountText(s.Range.High, s.Unit), s.Name), "write a value within the range")
	}
	s.Initial = &raw
	return true
}

// rawOf is the bit pattern of a value, exactly.
func (c *compiler) rawOf(s *Signal, v *big.Rat, bad func(problem, remedy string) bool) (uint64, bool) {
	n := v
	if s.Kind.isNumber() {
		var ok bool
		if n, ok = s.back(v); !ok {
			return 0, bad(fmt.Sprintf("%s is beyond the curve %s", amountText(v, s.Unit), s.Curve.Name), "write a value on the curve")
		}
	}
	low, high := numbers(s.Kind, s.Width)
	if n.Cmp(low) < 0 || n.Cmp(high) > 0 {
		return 0, bad(fmt.Sprintf("%s would be raw %s, but %s has %s", amountText(v, s.Unit), numberText(n), s.Name, rawText(s)), "write a value that fits")
	}
	if s.Kind == Float {
		f, _ := n.Float64()
		raw := bits.PutFloat(f, s.Width)
		if back := new(big.Rat).SetFloat64(bits.Float(raw, s.Width)); back == nil || back.Cmp(n) != 0 {
			return 0, bad(fmt.Sprintf("%s is no float of %d bits", amountText(v, s.Unit), s.Width), "write a value that a float holds exactly")
		}
		return raw, true
	}
	if !n.IsInt() {
		below := floorRat(n)
		above := new(big.Rat).Add(below, big.NewRat(1, 1))
		return 0, bad(fmt.Sprintf("%s lies between raw %s (%s) and raw %s (%s)", amountText(v, s.Unit), numberText(below), s.valueText(below), numberText(above), s.valueText(above)),
			"write a value that a raw value gives")
	}
	switch s.Kind {
	case Signed:
		return uint64(n.Num().Int64()) & onesOf(s.Width), true
	case SignMagnitude:
		return bits.PutSignMagnitude(n.Num().Int64(), s.Width)
	case PackedDecimal:
		return bits.PutPackedDecimal(n.Num().Uint64(), s.Width)
	}
	return n.Num().Uint64(), true
}

// valueText is the physical value of a raw number.
func (s *Signal) valueText(n *big.Rat) string {
	if s.Affine == nil {
		return numberText(n)
	}
	v := s.Affine.at(n)
	if s.Curve != nil {
		y, ok := s.Curve.At(v)
		if !ok {
			return "no value"
		}
		v = y
	}
	return amountText(v, s.Unit)
}

func (s *Signal) codeAt(raw uint64) *Code {
	for i := range s.Codes {
		if r := s.Codes[i].Raw; r.Low <= raw && raw <= r.High {
			return &s.Codes[i]
		}
	}
	return nil
}

func (s *Signal) stateAt(raw uint64) *State {
	for i := range s.States {
		if r := s.States[i].Raw; r.Low <= raw && raw <= r.High {
			return &s.States[i]
		}
	}
	return nil
}

// label is the class with the name.
func (k *Code) label() string {
	if k.Name == "" {
		return k.Class.String()
	}
	return k.Class.String() + " " + k.Name
}

// named lists the raw values that a word means for the signal: a state, a
// code by its name, a code by its class if it has no name, on and off of a
// flag.
func (s *Signal) named(word string) []RawRange {
	if s.Kind == Flag {
		switch word {
		case "off":
			return []RawRange{{0, 0}}
		case "on":
			return []RawRange{{1, 1}}
		}
	}
	var out []RawRange
	for _, st := range s.States {
		if st.Name == word {
			out = append(out, st.Raw)
		}
	}
	for _, k := range s.Codes {
		if k.Name == word || (k.Name == "" && k.Class.String() == word) {
			out = append(out, k.Raw)
		}
	}
	return out
}

// words lists what named knows.
func (s *Signal) words() []string {
	var out []string
	if s.Kind == Flag {
		out = append(out, "off", "on")
	}
	for _, st := range s.States {
		out = append(out, st.Name)
	}
	for _, k := range s.Codes {
		if k.Name != "" {
			out = append(out, k.Name)
		} else {
			out = append(out, k.Class.String())
		}
	}
	return out
}

func (c *compiler) initialName(m *member, name *syntax.Name) bool {
	s := m.sig
	ranges := s.named(name.Text)
	if len(ranges) == 0 {
		c.unknownWord(diag.BadInitial, m, *name)
		return false
	}
	if len(ranges) > 1 || ranges[0].Low != ranges[0].High {
		c.report(diag.BadInitial, name.Span, fmt.Sprintf("%s stands for several raw values of %s", name.Text, s.Name), "write the raw value")
		return false
	}
	raw := ranges[0].Low
	s.Initial = &raw
	return true
}

// unknownWord reports a word that is no state or code of a member.
func (c *compiler) unknownWord(code diag.Code, m *member, name syntax.Name) {
	if c.damaged {
		return // it may be among what couldn't be read
	}
	words := m.sig.words()
	remedy := "write a raw value"
	if len(words) > 0 && len(words) <= 8 {
		remedy = "write one of " + listed(words)
	}
	if near := c.nearest(name.Text, words); near != "" {
		remedy = "did you mean " + near + "?"
	}
	d := c.report(code, name.Span, fmt.Sprintf("%s has no state or code %s", m.path, name.Text), remedy)
	if m.tree.Table != nil {
		d.Also(m.tree.Table.Span, "its table")
	}
}
