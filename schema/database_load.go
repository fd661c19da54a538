package schema

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"math/big"
	"slices"
	"strconv"
	"strings"
	"time"

	"busloom/bits"
	"busloom/crc"
	"busloom/diag"
	"busloom/frame"
	"busloom/unit"
)

// IsDatabase reports whether text looks like a database rather than a
// description: its first character is an opening brace.
func IsDatabase(text []byte) bool {
	return bytes.HasPrefix(bytes.TrimLeft(text, " \t\r\n"), []byte("{"))
}

// LoadDatabase reads what WriteDatabase wrote. It proves all that a decoder
// relies on, so a database from anywhere is safe to use. The network is nil if
// the list has errors.
func LoadDatabase(file *diag.File) (*Network, *diag.List) {
	list := &diag.List{}
	whole := diag.Span{File: file, Start: 0, End: min(1, len(file.Text))}

	var head struct {
		Format  string `json:"format"`
		Version int    `json:"version"`
	}
	if err := json.Unmarshal(file.Text, &head); err != nil {
		list.Report(diag.DatabaseUnreadable, jsonSpan(file, err), "this is no JSON document: "+err.Error(),
			"compile the description again with busloom compile")
		return nil, list
	}
	if head.Format != DatabaseFormat {
		list.Report(diag.DatabaseUnreadable, whole, fmt.Sprintf("the field format is %q, a database has %q", head.Format, DatabaseFormat),
			"give a description, or a database that busloom compile wrote")
		return nil, list
	}
	if head.Version != DatabaseVersion {
		list.Report(diag.DatabaseVersion, whole, fmt.Sprintf("the database has version %d, this program reads version %d", head.Version, DatabaseVersion),
			"compile the description again with this program")
		return nil, list
	}
	var form dbFile
	dec := json.NewDecoder(bytes.NewReader(file.Text))
	dec.DisallowUnknownFields()
	if err := dec.Decode(&form); err != nil {
		list.Report(diag.DatabaseContent, jsonSpan(file, err), "the database doesn't have the documented form: "+err.Error(),
			"compile the description again with busloom compile")
		return nil, list
	}
	if _, err := dec.Token(); !errors.Is(err, io.EOF) {
		list.Report(diag.DatabaseUnreadable, diag.Span{File: file, Start: int(dec.InputOffset()), End: len(file.Text)},
			"something stands after the end of the database", "remove it")
		return nil, list
	}
	if want := fingerprintOf(&form.Network); form.Fingerprint != want {
		list.Report(diag.DatabaseFingerprint, whole,
			fmt.Sprintf("the fingerprint in the database is %.23s…, its content gives %.23s…", form.Fingerprint, want),
			"compile the description again: the database was changed by hand or damaged")
		return nil, list
	}
	n, err := (&loader{}).network(&form.Network)
	if err != nil {
		list.Report(diag.DatabaseContent, whole, err.Error(), "compile the description again with busloom compile")
		return nil, list
	}
	return n, list
}

func jsonSpan(file *diag.File, err error) diag.Span {
	at := len(file.Text)
	var syntax *json.SyntaxError
	var kind *json.UnmarshalTypeError
	switch {
	case errors.As(err, &syntax):
		at = int(syntax.Offset) - 1
	case errors.As(err, &kind):
		at = int(kind.Offset) - 1
	}
	at = max(0, min(at, len(file.Text)))
	return diag.Span{File: file, Start: at, End: min(at+1, len(file.Text))}
}

// loader rebuilds the model; where it fails, its error names the part.
type loader struct {
	units  map[string]unit.Unit
	buses  map[string]*Bus
	ecus   map[string]*ECU
	curves map[string]*Curve
}

func in[T any](part string, f func() (T, error)) (T, error) {
	v, err := f()
	if err != nil {
		err = fmt.Errorf("%s: %w", part, err)
	}
	return v, err
}

func (l *loader) network(d *dbNetwork) (*Network, error) {
	n := &Network{Name: d.Name, Text: d.Text}
	l.units = map[string]unit.Unit{"": {}}
	for _, u := range d.Units {
		v, err := in("unit "+u.Symbol, func() (unit.Unit, error) { return loadUnit(u) })
		if err != nil {
			return nil, err
		}
		if _, twice := l.units[u.Symbol]; twice {
			return nil, fmt.Errorf("unit %q is there twice", u.Symbol)
		}
		l.units[u.Symbol] = v
	}
	l.buses = map[string]*Bus{}
	for _, b := range d.Buses {
		if l.buses[b.Name] != nil || b.Name == "" {
			return nil, fmt.Errorf("bus %q is there twice or has no name", b.Name)
		}
		bus := &Bus{Name: b.Name, Text: b.Text, BitRate: b.BitRate, FDRate: b.FDRate}
		l.buses[b.Name] = bus
		n.Buses = append(n.Buses, bus)
	}
	l.ecus = map[string]*ECU{}
	for _, e := range d.ECUs {
		if l.ecus[e.Name] != nil {
			return nil, fmt.Errorf("ECU %q is there twice", e.Name)
		}
		ecu := &ECU{Name: e.Name, Text: e.Text, Source: e.Source}
		for _, b := range e.Buses {
			bus, err := find(l.buses, "bus", b)
			if err != nil {
				return nil, fmt.Errorf("ECU %s: %w", e.Name, err)
			}
			ecu.Buses = append(ecu.Buses, bus)
		}
		l.ecus[e.Name] = ecu
		n.ECUs = append(n.ECUs, ecu)
	}
	for _, u := range d.UnitNames {
		def := unit.Definition{Name: u.Name, Text: u.Text}
		if u.Value != "" {
			var err error
			if def.Value, err = loadRat(u.Value); err != nil {
				return nil, fmt.Errorf("declared unit %s: %w", u.Name, err)
			}
			if def.Of, err = l.unit(u.Of); err != nil {
				return nil, fmt.Errorf("declared unit %s: %w", u.Name, err)
			}
		}
		n.Units = append(n.Units, def)
	}
	l.curves = map[string]*Curve{}
	for _, c := range d.Curves {
		curve, err := in("curve "+c.Name, func() (*Curve, error) { return l.curve(c) })
		if err != nil {
			return nil, err
		}
		l.curves[c.Name] = curve
		n.Curves = append(n.Curves, curve)
	}
	for _, c := range d.CodeSets {
		n.CodeSets = append(n.CodeSets, &CodeSet{Name: c.Name, Text: c.Text})
	}
	for _, s := range d.StateSets {
		set := &StateSet{Name: s.Name, Text: s.Text}
		var err error
		if set.States, err = loadStates(s.States, 64); err != nil {
			return nil, fmt.Errorf("states %s: %w", s.Name, err)
		}
		if set.Codes, err = loadCodes(s.Codes, 64); err != nil {
			return nil, fmt.Errorf("states %s: %w", s.Name, err)
		}
		n.StateSets = append(n.StateSets, set)
	}
	type key struct{ name, bus string }
	byKey := map[key]*Message{}
	for i := range d.Messages {
		dm := &d.Messages[i]
		m, err := in("message "+dm.Name, func() (*Message, error) { return l.message(dm) })
		if err != nil {
			return nil, err
		}
		k := key{m.Name, m.Bus.Name}
		if byKey[k] != nil {
			return nil, fmt.Errorf("message %s is there twice on bus %s", m.Name, m.Bus.Name)
		}
		byKey[k] = m
		n.Messages = append(n.Messages, m)
	}
	for i := range d.Messages {
		if r := d.Messages[i].Relayed; r != nil {
			by, err := find(l.ecus, "ECU", r.By)
			if err != nil {
				return nil, fmt.Errorf("message %s: %w", d.Messages[i].Name, err)
			}
			from := byKey[key{d.Messages[i].Name, r.FromBus}]
			if from == nil {
				return nil, fmt.Errorf("message %s is relayed from bus %q, where it isn't", d.Messages[i].Name, r.FromBus)
			}
			n.Messages[i].Relayed = &Relay{By: by, From: from}
		}
	}
	return n, nil
}

func find[T any](table map[string]T, kind, name string) (T, error) {
	v, ok := table[name]
	if !ok {
		return v, fmt.Errorf("there is no %s %q", kind, name)
	}
	return v, nil
}

func (l *loader) unit(symbol string) (unit.Unit, error) { return find(l.units, "unit", symbol) }

func loadUnit(d dbUnit) (unit.Unit, error) {
	factor, err := loadRat(d.Factor)
	if err != nil {
		return unit.Unit{}, err
	}
	if factor.Sign() <= 0 {
		return unit.Unit{}, fmt.Errorf("the factor %s isn't above zero", d.Factor)
	}
	if d.Pi < -8 || d.Pi > 8 {
		return unit.Unit{}, fmt.Errorf("pi to the power %d is out of range", d.Pi)
	}
	u := unit.Unit{Symbol: d.Symbol, Dim: unit.Dimension(d.Dimension), Factor: factor, PiPower: d.Pi, Point: d.Point}
	if d.Zero != "" {
		if u.Zero, err = loadRat(d.Zero); err != nil {
			return unit.Unit{}, err
		}
	} else if d.Point {
		u.Zero = new(big.Rat)
	}
	return u, nil
}

// longestRat keeps a hostile database from costing much: an honest one has
// numbers of a few dozen digits.
const longestRat = 2000

func loadRat(text string) (*big.Rat, error) {
	if len(text) > longestRat || strings.ContainsAny(text, ".eExXpPbBoO_") {
		return nil, fmt.Errorf("%.20q is no whole number or fraction such as 1/100", text)
	}
	r, ok := new(big.Rat).SetString(text)
	if !ok {
		return nil, fmt.Errorf("%.20q is no whole number or fraction such as 1/100", text)
	}
	return r, nil
}

func loadRaw(text string, width int) (uint64, error) {
	digits, ok := strings.CutPrefix(text, "0x")
	v, err := strconv.ParseUint(digits, 16, 64)
	if !ok || err != nil || strings.HasPrefix(digits, "+") {
		return 0, fmt.Errorf("%q is no raw value such as 0x0F", text)
	}
	if width < 64 && v>>width != 0 {
		return 0, fmt.Errorf("raw value %s needs more than %d bits", text, width)
	}
	return v, nil
}

func loadRawRange(text string, width int) (r RawRange, err error) {
	low, high, isRange := strings.Cut(text, "-")
	if r.Low, err = loadRaw(low, width); err != nil {
		return r, err
	}
	r.High = r.Low
	if isRange {
		if r.High, err = loadRaw(high, width); err != nil {
			return r, err
		}
		if r.High < r.Low {
			return r, fmt.Errorf("the range %s is upside down", text)
		}
	}
	return r, nil
}

func loadOptionalRaw(text string, width int) (*uint64, error) {
	if text == "" {
		return nil, nil
	}
	v, err := loadRaw(text, width)
	return &v, err
}

func loadByte(v *int) (*byte, error) {
	if v == nil {
		return nil, nil
	}
	if *v < 0 || *v > 255 {
		return nil, fmt.Errorf("%d is no byte", *v)
	}
	b := byte(*v)
	return &b, nil
}

func loadCodes(words []dbWord, width int) ([]Code, error) {
	var out []Code
	for _, w := range words {
		r, err := loadRawRange(w.Raw, width)
		if err != nil {
			return nil, err
		}
		class, ok := word(classWords, w.Class)
		if !ok {
			return nil, fmt.Errorf("code %s has the unknown class %q", w.Raw, w.Class)
		}
		if len(out) > 0 && out[len(out)-1].Raw.High >= r.Low {
			return nil, fmt.Errorf("code %s overlaps or isn't in order", w.Raw)
		}
		out = append(out, Code{r, class, w.Name, w.Text})
	}
	return out, nil
}

func loadStates(words []dbWord, width int) ([]State, error) {
	var out []State
	for _, w := range words {
		r, err := loadRawRange(w.Raw, width)
		if err != nil {
			return nil, err
		}
		if w.Class != "" || w.Name == "" {
			return nil, fmt.Errorf("state %s needs a name and no class", w.Raw)
		}
		if len(out) > 0 && out[len(out)-1].Raw.High >= r.Low {
			return nil, fmt.Errorf("state %s overlaps or isn't in order", w.Raw)
		}
		out = append(out, State{r, w.Name, w.Text})
	}
	return out, nil
}

func (l *loader) curve(d dbCurve) (c *Curve, err error) {
	c = &Curve{Name: d.Name, Text: d.Text}
	if l.curves[d.Name] != nil {
		return nil, errors.New("it is there twice")
	}
	if c.From, err = l.unit(d.From); err != nil {
		return nil, err
	}
	if c.To, err = l.unit(d.To); err != nil {
		return nil, err
	}
	var ok bool
	if c.Outside, ok = word(outsideWords, d.Outside); !ok {
		return nil, fmt.Errorf("outside is %q", d.Outside)
	}
	if len(d.Points) < 2 {
		return nil, errors.New("it has fewer than two points")
	}
	for i, p := range d.Points {
		var q Point
		if q.X, err = loadRat(p[0]); err != nil {
			return nil, err
		}
		if q.Y, err = loadRat(p[1]); err != nil {
			return nil, err
		}
		c.Points = append(c.Points, q)
		if i == 0 {
			continue
		}
		if q.X.Cmp(c.Points[i-1].X) <= 0 {
			return nil, fmt.Errorf("point %s isn't right of the one before", p[0])
		}
		step, first := q.Y.Cmp(c.Points[i-1].Y), c.Points[1].Y.Cmp(c.Points[0].Y)
		if step == 0 || step != first {
			return nil, fmt.Errorf("at point %s the curve turns or rests", p[0])
		}
	}
	return c, nil
}

func (l *loader) message(d *dbMessage) (m *Message, err error) {
	m = &Message{Name: d.Name, Text: d.Text, FD: d.FD, Size: d.Size, AtLeast: d.AtLeast,
		AnySender: d.AnySender, OneFitted: d.OneFitted, Notes: loadNotes(d.Notes)}
	if m.Bus, err = find(l.buses, "bus", d.Bus); err != nil {
		return nil, err
	}
	if !frame.ValidLen(d.Size, d.FD) {
		return nil, fmt.Errorf("no frame has %d bytes", d.Size)
	}
	if m.ID, err = loadID(&d.ID); err != nil {
		return nil, err
	}
	for _, s := range d.Senders {
		e, err := find(l.ecus, "ECU", s)
		if err != nil {
			return nil, err
		}
		m.Senders = append(m.Senders, e)
	}
	for _, s := range d.Receivers {
		e, err := find(l.ecus, "ECU", s)
		if err != nil {
			return nil, err
		}
		m.Receivers = append(m.Receivers, e)
	}
	if t := d.Timing; t != nil {
		if t.Period < 0 || t.Gap < 0 || t.LostAfter < 0 {
			return nil, errors.New("a time is below zero")
		}
		m.Timing = Timing{time.Duration(t.Period), t.OnChange, t.OnRequest, time.Duration(t.Gap), time.Duration(t.LostAfter)}
	}
	if m.Fill, err = loadByte(d.Fill); err != nil {
		return nil, err
	}
	if d.Deprecated != nil {
		m.Deprecated = &Deprecation{d.Deprecated.ReplacedBy}
	}
	byName := map[string]*Signal{}
	for i := range d.Signals {
		ds := &d.Signals[i]
		s, err := in("signal "+ds.Name, func() (*Signal, error) { return l.signal(ds, m) })
		if err != nil {
			return nil, err
		}
		if byName[s.Name] != nil || s.Name == "" {
			return nil, fmt.Errorf("signal %q is there twice or has no name", s.Name)
		}
		byName[s.Name] = s
		m.Signals = append(m.Signals, s)
	}
	for i := range d.Signals {
		if c := d.Signals[i].Checksum; c != nil && c.Counter != "" {
			counter, err := find(byName, "signal", c.Counter)
			if err != nil {
				return nil, fmt.Errorf("signal %s: %w", d.Signals[i].Name, err)
			}
			if counter.Counter == nil {
				return nil, fmt.Errorf("signal %s: %s is no counter", d.Signals[i].Name, c.Counter)
			}
			m.Signals[i].Checksum.Counter = counter
		}
	}
	for _, text := range d.Unused {
		p, err := loadPlace(text, d.Size)
		if err != nil {
			return nil, fmt.Errorf("unused: %w", err)
		}
		m.Unused = append(m.Unused, p)
	}
	placed := map[*Signal]bool{}
	for i := range d.Selects {
		s, err := loadSelect(&d.Selects[i], byName, placed, nil, 0)
		if err != nil {
			return nil, err
		}
		m.Selects = append(m.Selects, s)
	}
	return m, l.checkSelectors(m)
}

// checkSelectors proves that every selector is present whenever its choice is
// asked, and that choices don't depend on each other in a ring.
func (l *loader) checkSelectors(m *Message) error {
	for _, s := range m.Signals {
		for i, c := range s.When {
			if len(c.Selector.When) > i {
				return fmt.Errorf("signal %s: its selector %s may be absent", s.Name, c.Selector.Name)
			}
			for j, outer := range c.Selector.When {
				if c := s.When[j]; outer.Selector != c.Selector || outer.Not != c.Not || !slices.Equal(outer.Values, c.Values) {
					return fmt.Errorf("signal %s: its selector %s may be absent", s.Name, c.Selector.Name)
				}
			}
		}
	}
	return nil
}

func loadID(d *dbID) (ID, error) {
	id := ID{Extended: d.Extended, Form: d.Form}
	bitsOfID := 11
	if d.Extended {
		bitsOfID = 29
	}
	for _, f := range []struct {
		text string
		to   *uint32
	}{{d.Value, &id.Value}, {d.Mask, &id.Mask}, {d.Send, &id.Send}} {
		v, err := loadRaw(f.text, bitsOfID)
		if err != nil {
			return id, fmt.Errorf("id: %w", err)
		}
		*f.to = uint32(v)
	}
	if id.Value&^id.Mask != 0 {
		return id, errors.New("id: the value has bits outside the mask")
	}
	for _, f := range d.Fields {
		if f.Width < 1 || f.Shift < 0 || f.Shift+f.Width > bitsOfID {
			return id, fmt.Errorf("id field %s doesn't fit", f.Name)
		}
		v, err := loadRaw(f.Value, f.Width)
		if err != nil {
			return id, fmt.Errorf("id field %s: %w", f.Name, err)
		}
		id.Fields = append(id.Fields, IDField{f.Name, f.Shift, f.Width, f.Open, f.Usually, uint32(v)})
	}
	return id, nil
}

func loadPlace(text string, size int) (bits.Place, error) {
	p, err := bits.Parse(text)
	if err != nil {
		return p, err
	}
	if err := p.Check(); err != nil {
		return p, err
	}
	if p.LastByte() >= size {
		return p, fmt.Errorf("place %s is past the end", text)
	}
	return p, nil
}

func loadNotes(notes []dbNote) []Note {
	var out []Note
	for _, n := range notes {
		out = append(out, Note(n))
	}
	return out
}

func (l *loader) signal(d *dbSignal, m *Message) (s *Signal, err error) {
	s = &Signal{Name: d.Name, Text: d.Text, ToEnd: d.ToEnd, CodeSet: d.CodeSet, StateSet: d.StateSet, Notes: loadNotes(d.Notes)}
	var ok bool
	if s.Kind, ok = word(kindWords, d.Kind); !ok {
		return nil, fmt.Errorf("the kind is %q", d.Kind)
	}
	size := m.Size
	if s.ToEnd && m.AtLeast {
		size++ // what goes on to the end may begin where the fixed bytes end
	}
	if s.Place, err = loadPlace(d.Place, size); err != nil {
		return nil, err
	}
	s.Width = s.Place.Width()
	if err := checkWidth(s); err != nil {
		return nil, err
	}
	rawWidth := min(s.Width, 64)
	if s.FillByte, err = loadByte(d.FillByte); err != nil {
		return nil, err
	}
	if s.Fixed, err = loadOptionalRaw(d.Fixed, rawWidth); err != nil {
		return nil, err
	}
	if s.Initial, err = loadOptionalRaw(d.Initial, rawWidth); err != nil {
		return nil, err
	}
	if s.Unit, err = l.unit(d.Unit); err != nil {
		return nil, err
	}
	if s.Codes, err = loadCodes(d.Codes, rawWidth); err != nil {
		return nil, err
	}
	if s.States, err = loadStates(d.States, rawWidth); err != nil {
		return nil, err
	}
	if d.Deprecated != nil {
		s.Deprecated = &Deprecation{d.Deprecated.ReplacedBy}
	}
	if err := l.conversion(d, s); err != nil {
		return nil, err
	}
	if s.Counter, err = loadCounter(d.Counter, s); err != nil {
		return nil, err
	}
	s.Checksum, err = loadChecksum(d.Checksum, s, m)
	return s, err
}

// checkWidth proves that the kind can have the signal's width.
func checkWidth(s *Signal) error {
	ok := s.Width >= 1 && s.Width <= 64
	switch s.Kind {
	case TextASCII, TextUTF8, Bytes:
		ok = s.Width >= 8 && s.Width%8 == 0
	case Float:
		ok = s.Width == 16 || s.Width == 32 || s.Width == 64
	case PackedDecimal:
		ok = ok && s.Width%4 == 0
	case Flag:
		ok = s.Width == 1
	case Signed, SignMagnitude:
		ok = ok && s.Width >= 2
	}
	if !ok {
		return fmt.Errorf("%s can't have %d bits", s.Kind, s.Width)
	}
	if s.ToEnd && s.Kind != TextASCII && s.Kind != TextUTF8 && s.Kind != Bytes {
		return fmt.Errorf("%s can't go on to the end", s.Kind)
	}
	return nil
}

// isNumber reports whether the kind is converted by a formula.
func (k Kind) isNumber() bool {
	switch k {
	case Unsigned, Signed, SignMagnitude, Float, PackedDecimal:
		return true
	}
	return false
}

func (l *loader) conversion(d *dbSignal, s *Signal) (err error) {
	if d.Factor != "" {
		s.Affine = &Affine{}
		if s.Affine.A, err = loadRat(d.Factor); err != nil {
			return err
		}
		if s.Affine.B, err = loadRat(d.Offset); err != nil {
			return err
		}
	}
	if s.Kind.isNumber() && s.Affine == nil {
		return errors.New("a number needs factor and offset")
	}
	if !s.Kind.isNumber() && (s.Affine != nil || d.Curve != "") && s.Kind != Counter {
		return fmt.Errorf("%s can't have a conversion", s.Kind)
	}
	if s.Affine != nil {
		if err := checkAffine(s.Affine); err != nil {
			return err
		}
	}
	if d.Curve != "" {
		if s.Curve, err = find(l.curves, "curve", d.Curve); err != nil {
			return err
		}
	}
	if d.Low != "" || d.High != "" {
		s.Range = &Range{}
		if s.Range.Low, err = loadRat(d.Low); err != nil {
			return err
		}
		if s.Range.High, err = loadRat(d.High); err != nil {
			return err
		}
	}
	if d.Tolerance != "" {
		if s.Tolerance, err = loadRat(d.Tolerance); err != nil {
			return err
		}
	}
	return nil
}

// checkAffine keeps factor and offset within what is computed exactly.
func checkAffine(a *Affine) error {
	if a.A.Sign() == 0 {
		return errors.New("the factor is zero")
	}
	for _, n := range []*big.Int{a.A.Num(), a.A.Denom(), a.B.Num(), a.B.Denom()} {
		if n.BitLen() > 256 {
			return errors.New("factor or offset has too many digits")
		}
	}
	return nil
}

func loadCounter(d *dbCounter, s *Signal) (*CounterRule, error) {
	if (d != nil) != (s.Kind == Counter) {
		return nil, errors.New("the kind counter and a counter's rule go together")
	}
	if d == nil {
		return nil, nil
	}
	c := &CounterRule{}
	for _, f := range []struct {
		text string
		to   *uint64
	}{{d.Low, &c.Low}, {d.High, &c.High}, {d.Step, &c.Step}, {d.AllowedLost, &c.AllowLost}, {d.AllowedRepeated, &c.AllowRepeated}} {
		if f.text == "" && (f.to == &c.AllowLost || f.to == &c.AllowRepeated) {
			continue
		}
		v, err := loadRaw(f.text, s.Width)
		if err != nil {
			return nil, fmt.Errorf("counter: %w", err)
		}
		*f.to = v
	}
	if c.Step == 0 || c.Low >= c.High || (c.High-c.Low)%c.Step != 0 {
		return nil, errors.New("counter: low, high and step don't fit each other")
	}
	return c, nil
}

func loadChecksum(d *dbChecksum, s *Signal, m *Message) (*ChecksumRule, error) {
	if (d != nil) != (s.Kind == Checksum) {
		return nil, errors.New("the kind checksum and a checksum's rule go together")
	}
	if d == nil {
		return nil, nil
	}
	c := &ChecksumRule{Method: d.Method}
	if p := d.CRC; p != nil {
		if p.Width < 1 || p.Width > 64 {
			return nil, fmt.Errorf("checksum: a CRC of %d bits", p.Width)
		}
		c.CRC = &crc.Params{Name: p.Name, Width: p.Width, ReflectIn: p.ReflectIn, ReflectOut: p.ReflectOut}
		for _, f := range []struct {
			text string
			to   *uint64
		}{{p.Polynomial, &c.CRC.Poly}, {p.Initial, &c.CRC.Init}, {p.Final, &c.CRC.XorOut}} {
			v, err := loadRaw(f.text, p.Width)
			if err != nil {
				return nil, fmt.Errorf("checksum: %w", err)
			}
			*f.to = v
		}
		if err := c.CRC.Validate(); err != nil {
			return nil, fmt.Errorf("checksum: %w", err)
		}
		if p.Width != s.Width {
			return nil, fmt.Errorf("checksum: a CRC of %d bits in %d", p.Width, s.Width)
		}
	} else if !slices.Contains([]string{"xor8", "sum8"}, d.Method) {
		return nil, fmt.Errorf("checksum: %q needs CRC parameters", d.Method)
	} else if s.Width != 8 {
		return nil, fmt.Errorf("checksum: %s has 8 bits", d.Method)
	}
	own := map[int]bool{}
	for _, b := range s.Place.Bits() {
		own[b.Byte] = true
	}
	for _, f := range d.Feed {
		feed, err := loadFeed(f, m, d.Counter != "")
		if err != nil {
			return nil, fmt.Errorf("checksum: %w", err)
		}
		if feed.Kind == FeedBytes {
			for b := feed.First; b <= feed.Last || (feed.Last == -1 && b < m.Size); b++ {
				if own[b] {
					return nil, errors.New("checksum: it covers itself")
				}
			}
		}
		c.Feed = append(c.Feed, feed)
	}
	return c, nil
}

func loadFeed(f dbFeed, m *Message, counter bool) (Feed, error) {
	switch {
	case f.Byte != nil && f.First == nil && f.Last == nil && f.Table == nil:
		b, err := loadByte(f.Byte)
		if err != nil {
			return Feed{}, err
		}
		return Feed{Kind: FeedConst, Byte: *b}, nil
	case f.Byte == nil && f.First != nil && f.Last != nil && f.Table == nil:
		toEnd := *f.Last == -1 && m.AtLeast
		if *f.First < 0 || *f.First >= m.Size || (!toEnd && (*f.Last < *f.First || *f.Last >= m.Size)) {
			return Feed{}, fmt.Errorf("bytes %d..%d aren't in the message", *f.First, *f.Last)
		}
		return Feed{Kind: FeedBytes, First: *f.First, Last: *f.Last}, nil
	case f.Byte == nil && f.First == nil && f.Last == nil && len(f.Table) > 0 && counter:
		feed := Feed{Kind: FeedByCounter}
		for i := range f.Table {
			b, err := loadByte(&f.Table[i])
			if err != nil {
				return Feed{}, err
			}
			feed.Table = append(feed.Table, *b)
		}
		return feed, nil
	}
	return Feed{}, errors.New("a feed is one of byte, first and last, or table")
}

// deepestSelect bounds nesting, as the language does.
const deepestSelect = 64

func loadSelect(d *dbSelect, signals map[string]*Signal, placed map[*Signal]bool, when []Choice, depth int) (*Select, error) {
	if depth > deepestSelect {
		return nil, errors.New("selections are nested too deep")
	}
	s := &Select{}
	var err error
	if s.Selector, err = find(signals, "signal", d.Selector); err != nil {
		return nil, fmt.Errorf("select: %w", err)
	}
	switch s.Selector.Kind {
	case Float, TextASCII, TextUTF8, Bytes, Checksum:
		return nil, fmt.Errorf("select: %s can't select", d.Selector)
	}
	var ok bool
	if s.Otherwise, ok = word(otherwiseWords, d.Otherwise); !ok || (s.Otherwise == OtherwiseBody) != (d.Else != nil) {
		return nil, fmt.Errorf("select %s: otherwise is %q", d.Selector, d.Otherwise)
	}
	var all []RawRange
	for i := range d.Branches {
		var values []RawRange
		for _, text := range d.Branches[i].Values {
			r, err := loadRawRange(text, s.Selector.Width)
			if err != nil {
				return nil, fmt.Errorf("select %s: %w", d.Selector, err)
			}
			values = append(values, r)
			all = append(all, r)
		}
		if len(values) == 0 {
			return nil, fmt.Errorf("select %s: a branch without values", d.Selector)
		}
		b, err := loadBranch(&d.Branches[i], signals, placed, append(slices.Clone(when), Choice{Selector: s.Selector, Values: values}), depth)
		if err != nil {
			return nil, err
		}
		b.Values = values
		s.Branches = append(s.Branches, *b)
	}
	slices.SortFunc(all, compareRaw)
	for i := 1; i < len(all); i++ {
		if all[i].Low <= all[i-1].High {
			return nil, fmt.Errorf("select %s: value %s is in two branches", d.Selector, hexRaw(all[i].Low))
		}
	}
	if d.Else != nil {
		if len(d.Else.Values) > 0 {
			return nil, fmt.Errorf("select %s: the else branch has values", d.Selector)
		}
		if s.Else, err = loadBranch(d.Else, signals, placed, append(slices.Clone(when), Choice{Selector: s.Selector, Values: all, Not: true}), depth); err != nil {
			return nil, err
		}
	}
	return s, nil
}

func compareRaw(a, b RawRange) int {
	switch {
	case a.Low < b.Low:
		return -1
	case a.Low > b.Low:
		return 1
	}
	return 0
}

func loadBranch(d *dbBranch, signals map[string]*Signal, placed map[*Signal]bool, when []Choice, depth int) (*Branch, error) {
	b := &Branch{}
	for _, name := range d.Signals {
		s, err := find(signals, "signal", name)
		if err != nil {
			return nil, fmt.Errorf("select: %w", err)
		}
		if placed[s] {
			return nil, fmt.Errorf("select: signal %s is in two branches", name)
		}
		placed[s] = true
		s.When = when
		b.Signals = append(b.Signals, s)
	}
	for i := range d.Selects {
		s, err := loadSelect(&d.Selects[i], signals, placed, when, depth+1)
		if err != nil {
			return nil, err
		}
		b.Selects = append(b.Selects, s)
	}
	return b, nil
}
