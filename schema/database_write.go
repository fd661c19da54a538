package schema

import (
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"fmt"
	"io"
	"math/big"
	"sort"

	"busloom/unit"
)

// WriteDatabase writes the network as one self-contained JSON document. The
// same network gives the same bytes on every machine.
func (n *Network) WriteDatabase(w io.Writer) error {
	file := dbFile{Format: DatabaseFormat, Version: DatabaseVersion, Network: n.form()}
	file.Fingerprint = fingerprintOf(&file.Network)
	b, err := marshal(&file, true)
	if err != nil {
		return err
	}
	_, err = w.Write(b)
	return err
}

// Fingerprint identifies the content of the network: the SHA-256 of its
// database form, written sha256:hex. Two descriptions with the same meaning
// and the same texts have the same fingerprint, however they are laid out.
func (n *Network) Fingerprint() string {
	form := n.form()
	return fingerprintOf(&form)
}

func fingerprintOf(form *dbNetwork) string {
	b, err := marshal(form, false)
	if err != nil {
		// Strings, numbers and slices of them can't fail to be written.
		panic("schema: " + err.Error())
	}
	sum := sha256.Sum256(b)
	return "sha256:" + hex.EncodeToString(sum[:])
}

func marshal(v any, indent bool) ([]byte, error) {
	var b bytes.Buffer
	enc := json.NewEncoder(&b)
	enc.SetEscapeHTML(false)
	if indent {
		enc.SetIndent("", " ")
	}
	err := enc.Encode(v)
	return b.Bytes(), err
}

func (n *Network) form() dbNetwork {
	out := dbNetwork{Name: n.Name, Text: n.Text, Buses: []dbBus{}, ECUs: []dbECU{}, Units: []dbUnit{}, Messages: []dbMessage{}}
	for _, b := range n.Buses {
		out.Buses = append(out.Buses, dbBus{b.Name, b.Text, b.BitRate, b.FDRate})
	}
	for _, e := range n.ECUs {
		d := dbECU{Name: e.Name, Text: e.Text, Buses: []string{}, Source: e.Source}
		for _, b := range e.Buses {
			d.Buses = append(d.Buses, b.Name)
		}
		out.ECUs = append(out.ECUs, d)
	}
	units := map[string]unit.Unit{}
	use := func(u unit.Unit) string {
		if u.Symbol != "" {
			units[u.Symbol] = u
		}
		return u.Symbol
	}
	for _, u := range n.Units {
		d := dbUnitName{Name: u.Name, Text: u.Text}
		if u.Value != nil {
			d.Value, d.Of = u.Value.RatString(), use(u.Of)
		}
		out.UnitNames = append(out.UnitNames, d)
	}
	for _, c := range n.Curves {
		d := dbCurve{Name: c.Name, Text: c.Text, From: use(c.From), To: use(c.To), Outside: c.Outside.String()}
		for _, p := range c.Points {
			d.Points = append(d.Points, [2]string{p.X.RatString(), p.Y.RatString()})
		}
		out.Curves = append(out.Curves, d)
	}
	for _, c := range n.CodeSets {
		out.CodeSets = append(out.CodeSets, dbCodeSet{c.Name, c.Text})
	}
	for _, s := range n.StateSets {
		out.StateSets = append(out.StateSets, dbStateSet{s.Name, s.Text, stateWords(s.States), codeWords(s.Codes)})
	}
	for _, m := range n.Messages {
		out.Messages = append(out.Messages, m.form(use))
	}
	for _, u := range units {
		d := dbUnit{Symbol: u.Symbol, Dimension: string(u.Dim), Factor: u.Factor.RatString(), Pi: u.PiPower, Point: u.Point}
		if u.Zero != nil && u.Zero.Sign() != 0 {
			d.Zero = u.Zero.RatString()
		}
		out.Units = append(out.Units, d)
	}
	sort.Slice(out.Units, func(i, j int) bool { return out.Units[i].Symbol < out.Units[j].Symbol })
	return out
}

func (m *Message) form(use func(unit.Unit) string) dbMessage {
	d := dbMessage{
		Name: m.Name, Text: m.Text, Bus: m.Bus.Name, FD: m.FD, Size: m.Size, AtLeast: m.AtLeast,
		AnySender: m.AnySender, OneFitted: m.OneFitted,
		ID: dbID{Extended: m.ID.Extended, Value: hexRaw(uint64(m.ID.Value)), Mask: hexRaw(uint64(m.ID.Mask)),
			Send: hexRaw(uint64(m.ID.Send)), Form: m.ID.Form},
		Senders: ecuNames(m.Senders), Receivers: ecuNames(m.Receivers),
		Notes: noteForms(m.Notes), Deprecated: replaceForm(m.Deprecated),
	}
	for _, f := range m.ID.Fields {
		d.ID.Fields = append(d.ID.Fields, dbIDField{f.Name, f.Shift, f.Width, f.Open, f.Usually, hexRaw(uint64(f.Value))})
	}
	if m.Timing != (Timing{}) {
		d.Timing = &dbTiming{int64(m.Timing.Period), m.Timing.OnChange, m.Timing.OnRequest, int64(m.Timing.Gap), int64(m.Timing.LostAfter)}
	}
	if m.Fill != nil {
		d.Fill = intOf(*m.Fill)
	}
	for _, s := range m.Signals {
		d.Signals = append(d.Signals, s.form(use))
	}
	for _, s := range m.Selects {
		d.Selects = append(d.Selects, s.form())
	}
	for _, p := range m.Unused {
		d.Unused = append(d.Unused, p.String())
	}
	if m.Relayed != nil {
		d.Relayed = &dbRelay{m.Relayed.By.Name, m.Relayed.From.Bus.Name}
	}
	return d
}

func (s *Signal) form(use func(unit.Unit) string) dbSignal {
	d := dbSignal{
		Name: s.Name, Text: s.Text, Place: s.Place.String(), Kind: s.Kind.String(), ToEnd: s.ToEnd,
		Fixed: optionalRaw(s.Fixed), Unit: use(s.Unit), Tolerance: ratText(s.Tolerance),
		Codes: codeWords(s.Codes), States: stateWords(s.States), CodeSet: s.CodeSet, StateSet: s.StateSet,
		Initial: optionalRaw(s.Initial), Deprecated: replaceForm(s.Deprecated), Notes: noteForms(s.Notes),
	}
	if s.FillByte != nil {
		d.FillByte = intOf(*s.FillByte)
	}
	if s.Affine != nil {
		d.Factor, d.Offset = s.Affine.A.RatString(), s.Affine.B.RatString()
	}
	if s.Curve != nil {
		d.Curve = s.Curve.Name
	}
	if s.Range != nil {
		d.Low, d.High = s.Range.Low.RatString(), s.Range.High.RatString()
	}
	if c := s.Counter; c != nil {
		d.Counter = &dbCounter{Low: hexRaw(c.Low), High: hexRaw(c.High), Step: hexRaw(c.Step)}
		if c.AllowLost > 0 {
			d.Counter.AllowedLost = hexRaw(c.AllowLost)
		}
		if c.AllowRepeated > 0 {
			d.Counter.AllowedRepeated = hexRaw(c.AllowRepeated)
		}
	}
	if c := s.Checksum; c != nil {
		d.Checksum = &dbChecksum{Method: c.Method, Feed: []dbFeed{}}
		if p := c.CRC; p != nil {
			d.Checksum.CRC = &dbCRC{p.Name, p.Width, hexRaw(p.Poly), hexRaw(p.Init), p.ReflectIn, p.ReflectOut, hexRaw(p.XorOut)}
		}
		for _, f := range c.Feed {
			d.Checksum.Feed = append(d.Checksum.Feed, f.form())
		}
		if c.Counter != nil {
			d.Checksum.Counter = c.Counter.Name
		}
	}
	return d
}

func (f Feed) form() dbFeed {
	switch f.Kind {
	case FeedConst:
		return dbFeed{Byte: intOf(f.Byte)}
	case FeedBytes:
		return dbFeed{First: intOf(f.First), Last: intOf(f.Last)}
	}
	table := make([]int, len(f.Table))
	for i, b := range f.Table {
		table[i] = int(b)
	}
	return dbFeed{Table: table}
}

func (s *Select) form() dbSelect {
	d := dbSelect{Selector: s.Selector.Name, Branches: []dbBranch{}, Otherwise: otherwiseWords[s.Otherwise]}
	for i := range s.Branches {
		d.Branches = append(d.Branches, s.Branches[i].form())
	}
	if s.Else != nil {
		b := s.Else.form()
		d.Else = &b
	}
	return d
}

func (b *Branch) form() dbBranch {
	var d dbBranch
	for _, v := range b.Values {
		d.Values = append(d.Values, v.String())
	}
	for _, s := range b.Signals {
		d.Signals = append(d.Signals, s.Name)
	}
	for _, s := range b.Selects {
		d.Selects = append(d.Selects, s.form())
	}
	return d
}

// String is 0x0F, or 0xF0-0xFD for a range.
func (r RawRange) String() string {
	if r.Low == r.High {
		return hexRaw(r.Low)
	}
	return hexRaw(r.Low) + "-" + hexRaw(r.High)
}

func hexRaw(v uint64) string { return fmt.Sprintf("0x%02X", v) }

func optionalRaw(v *uint64) string {
	if v == nil {
		return ""
	}
	return hexRaw(*v)
}

func ratText(r *big.Rat) string {
	if r == nil {
		return ""
	}
	return r.RatString()
}

func intOf[T byte | int](v T) *int {
	i := int(v)
	return &i
}

func ecuNames(ecus []*ECU) []string {
	var out []string
	for _, e := range ecus {
		out = append(out, e.Name)
	}
	return out
}

func noteForms(notes []Note) []dbNote {
	var out []dbNote
	for _, n := range notes {
		out = append(out, dbNote(n))
	}
	return out
}

func replaceForm(d *Deprecation) *dbReplace {
	if d == nil {
		return nil
	}
	return &dbReplace{d.ReplacedBy}
}

func codeWords(codes []Code) []dbWord {
	var out []dbWord
	for _, c := range codes {
		out = append(out, dbWord{c.Raw.String(), c.Class.String(), c.Name, c.Text})
	}
	return out
}

func stateWords(states []State) []dbWord {
	var out []dbWord
	for _, s := range states {
		out = append(out, dbWord{Raw: s.Raw.String(), Name: s.Name, Text: s.Text})
	}
	return out
}
