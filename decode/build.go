package decode

import (
	"fmt"
	"math/big"
	mathbits "math/bits"

	"busloom/bits"
	"busloom/schema"
	"busloom/unit"
)

// op says what a step does with its raw value.
type op uint8

const (
	// opPlain is a number with num = x*mul + add, a state, a flag or a code,
	// all in one way, so that the processor needn't guess which it is.
	opPlain   op = iota
	opGeneral    // any other kind of up to 64 bits
	opText
	opOctets
	opSelect // a selection
)

// source says where a step's raw value comes from.
type source uint8

const (
	fromLE        source = iota // the first 8 bytes, light byte first
	fromBE                      // the first 8 bytes, heavy byte first
	fromElsewhere               // further behind, or bit by bit
)

// step is one instruction of a message's program: take a value, or select.
type step struct {
	signal *Signal
	// opPlain: the codes lie within coded to coded+span; a value outside is
	// what the table says, with mul and add 0 for words.
	coded, span uint64
	sign        uint64 // the sign bit of a two's complement value, else 0
	mul, add    int64
	// far is what is needed less often.
	far *farStep

	// opPlain: Plan.meanings[table + raw&mask] says what a value is. A number
	// has mask 0 and the one meaning of all numbers.
	table uint32
	mask  uint8
	op    op
	from  source
	left  uint8 // the value is (word << left) >> right
	right uint8
	need  uint8 // payload bytes
}

// farStep is the rest of a step.
type farStep struct {
	extract bits.Extractor // fromElsewhere
	choose  *selection     // opSelect
}

// selection is what a selector chooses among.
type selection struct {
	selector bits.Extractor
	branches [][]step
	// dense has the branch + 1 of each value of a narrow selector.
	dense   []int16
	ranges  []branchRange
	other   []step // the otherwise branch
	unknown bool   // otherwise unknown
}

type branchRange struct {
	schema.RawRange
	branch int
}

type builder struct {
	plan    *Plan
	message *Message
	only    patterns
	units   *conversions
	tables  apartTables
}

func (b *builder) build() error {
	m := b.message.Model
	index := map[*schema.Signal]int{}
	for i, s := range m.Signals {
		index[s] = i
	}
	var always []*schema.Signal
	for _, s := range m.Signals {
		if len(s.When) == 0 {
			always = append(always, s)
		}
		if s.Counter != nil && b.message.counter == nil && len(s.When) == 0 {
			e := bits.Compile(s.Place)
			b.message.counter, b.message.rule = &e, s.Counter
		}
		if s.Checksum != nil && b.message.checksum == nil && len(s.When) == 0 {
			b.message.checksum = newChecksum(s, b.tables)
		}
	}
	var err error
	if b.message.program, err = b.steps(always, m.Selects, index); err != nil {
		return err
	}
	b.idFields()
	b.message.Wanted = len(b.message.Signals) > 0 || len(b.only) == 0 || (len(m.Signals) == 0 && b.only.wants(m, ""))
	return nil
}

// steps makes the program of some signals and selections, in text order.
func (b *builder) steps(signals []*schema.Signal, selects []*schema.Select, index map[*schema.Signal]int) ([]step, error) {
	var out []step
	for _, s := range signals {
		for len(selects) > 0 && firstSignal(selects[0], index) < index[s] {
			st, err := b.selectStep(selects[0], index)
			if err != nil {
				return nil, err
			}
			out = append(out, st)
			selects = selects[1:]
		}
		if !b.only.wants(b.message.Model, s.Name) {
			continue
		}
		st, err := b.signalStep(s)
		if err != nil {
			return nil, fmt.Errorf("signal %s: %w", s.Name, err)
		}
		out = append(out, st)
	}
	for _, sel := range selects {
		st, err := b.selectStep(sel, index)
		if err != nil {
			return nil, err
		}
		out = append(out, st)
	}
	return out, nil
}

// firstSignal is the text position of a selection's first signal.
func firstSignal(s *schema.Select, index map[*schema.Signal]int) int {
	first := len(index)
	branch := func(b *schema.Branch) {
		for _, x := range b.Signals {
			first = min(first, index[x])
		}
		for _, x := range b.Selects {
			first = min(first, firstSignal(x, index))
		}
	}
	for i := range s.Branches {
		branch(&s.Branches[i])
	}
	if s.Else != nil {
		branch(s.Else)
	}
	return first
}

func (b *builder) selectStep(s *schema.Select, index map[*schema.Signal]int) (step, error) {
	c := &selection{selector: bits.Compile(s.Selector.Place), unknown: s.Otherwise == schema.OtherwiseUnknown}
	if s.Selector.Width <= tableWidth {
		c.dense = make([]int16, 1<<s.Selector.Width)
	}
	for i := range s.Branches {
		program, err := b.steps(s.Branches[i].Signals, s.Branches[i].Selects, index)
		if err != nil {
			return step{}, err
		}
		c.branches = append(c.branches, program)
		for _, r := range s.Branches[i].Values {
			c.ranges = append(c.ranges, branchRange{r, i})
			for v := r.Low; c.dense != nil && v <= r.High && v < uint64(len(c.dense)); v++ {
				c.dense[v] = int16(i + 1)
			}
		}
	}
	if s.Else != nil {
		program, err := b.steps(s.Else.Signals, s.Else.Selects, index)
		if err != nil {
			return step{}, err
		}
		c.other = program
	}
	return step{op: opSelect, far: &farStep{choose: c}, need: uint8(c.selector.Need())}, nil
}

// choose returns the program for a selector's value.
func (c *selection) program(raw uint64) (program []step, listed bool) {
	if c.dense != nil {
		if i := c.dense[raw]; i > 0 {
			return c.branches[i-1], true
		}
		return c.other, false
	}
	for _, r := range c.ranges {
		if raw >= r.Low && raw <= r.High {
			return c.branches[r.branch], true
		}
	}
	return c.other, false
}

// register gives a signal its place in the plan.
func (b *builder) register(s *Signal) {
	s.Message = b.message
	s.Index = len(b.plan.Signals)
	b.plan.Signals = append(b.plan.Signals, s)
	b.message.Signals = append(b.message.Signals, s)
}

func (b *builder) signalStep(model *schema.Signal) (step, error) {
	s := &Signal{
		Model: model, Path: model.Name, Unit: model.Unit, kind: model.Kind, width: model.Width,
		states: model.States, place: model.Place, toEnd: model.ToEnd, fixed: model.Fixed,
	}
	for _, c := range model.Codes {
		s.codes = append(s.codes, code{c.Raw.Low, c.Raw.High})
	}
	b.register(s)
	st := step{signal: s, need: uint8(model.Place.LastByte() + 1)}
	if s.toEnd {
		s.rest = model.Place.LastByte() + 1
		if s.rest > b.message.size {
			// It begins where the fixed bytes end, so it may be empty.
			s.place.Runs = s.place.Runs[:len(s.place.Runs)-1]
			s.rest--
			st.need = uint8(s.rest)
		}
	}
	switch model.Kind {
	case schema.TextASCII, schema.TextUTF8:
		st.op = opText
		if model.FillByte != nil {
			s.fill = []byte{*model.FillByte}
		}
		return st, nil
	case schema.Bytes:
		st.op = opOctets
		return st, nil
	case schema.Flag:
		s.Words = []string{"off", "on"}
	case schema.States:
		for _, x := range model.States {
			s.Words = append(s.Words, x.Name)
		}
	}
	if s.IsNumber() {
		b.convert(s)
	}
	st.place(model.Place)
	b.setOp(&st, s)
	return st, nil
}

// convert prepares the conversion of a number, with the unit that is wanted.
func (b *builder) convert(s *Signal) {
	one, zero := big.NewRat(1, 1), new(big.Rat)
	a, c := one, zero
	if s.Model != nil && s.Model.Affine != nil {
		a, c = s.Model.Affine.A, s.Model.Affine.B
	}
	var post *line
	if to, ok := b.units.of(s.Unit); ok {
		x, y, exact, err := unit.Convert(s.Unit, to)
		if err == nil { // proven when the options were read
			post = &line{a: x, b: y, exact: exact}
			s.Unit = to
		}
	}
	var curve *schema.Curve
	if s.Model != nil {
		curve = s.Model.Curve
	}
	s.setConversion(a, c, curve, post)
}

// place sets where the raw value comes from.
func (st *step) place(p bits.Place) {
	e := bits.Compile(p)
	width := mathbits.Len64(e.Mask)
	st.right = uint8(64 - width)
	st.left = st.right - e.Shift
	switch {
	case e.Shape == bits.Pieces, e.Offset > 0:
		st.from = fromElsewhere
		st.left = st.right
		st.far = &farStep{extract: e}
	case e.Shape == bits.WordBE:
		st.from = fromBE
	default:
		st.from = fromLE
	}
}

// setOp finds the cheapest instruction for a signal.
func (b *builder) setOp(st *step, s *Signal) {
	st.op = opGeneral
	// Without codes the range is one value that no signal has; a signal of 64
	// bits may have it, and is then looked up for nothing.
	st.coded = ^uint64(0)
	if len(s.codes) > 0 {
		st.coded = s.codes[0].low
		st.span = s.codes[len(s.codes)-1].high - st.coded
	}
	switch s.kind {
	case schema.Flag, schema.States:
		if s.width <= tableWidth {
			st.op, st.coded, st.span = opPlain, ^uint64(0), 0
			st.mask = uint8(1<<s.width - 1)
			st.table = uint32(len(b.plan.meanings))
			for raw := range uint64(1) << s.width {
				b.plan.meanings = append(b.plan.meanings, s.search(raw))
			}
		}
		return
	case schema.Unsigned, schema.Counter, schema.Checksum:
	case schema.Signed:
		st.sign = 1 << (s.width - 1)
	default:
		return
	}
	if s.Scaled && s.curve == nil && s.round.r == 1 && s.fixed == nil {
		st.op, st.mul, st.add = opPlain, s.round.p, s.round.q
	}
}

// idFields adds the open fields of the identifier as signals.
func (b *builder) idFields() {
	for _, f := range b.message.Model.ID.Fields {
		name := "id." + f.Name
		if !f.Open || !b.only.wants(b.message.Model, name) {
			continue
		}
		s := &Signal{Path: name, kind: schema.Unsigned, width: f.Width, idShift: f.Shift}
		s.setConversion(big.NewRat(1, 1), new(big.Rat), nil, nil)
		b.register(s)
		b.message.ids = append(b.message.ids, s)
	}
}
