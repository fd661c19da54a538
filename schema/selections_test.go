package schema

import (
	"testing"

	"busloom/diag"

	"github.com/stretchr/testify/require"
)

func TestExclusive(t *testing.T) {
	page := &Signal{Name: "page", Width: 4}
	mode := &Signal{Name: "mode", Width: 2}
	is := func(s *Signal, values ...RawRange) Choice { return Choice{Selector: s, Values: values} }
	not := func(s *Signal, values ...RawRange) Choice { return Choice{Selector: s, Values: values, Not: true} }
	one := func(v uint64) RawRange { return RawRange{v, v} }
	for _, c := range []struct {
		name string
		a, b []Choice
		want bool
	}{
		{"always and always", nil, nil, false},
		{"always and chosen", nil, []Choice{is(page, one(1))}, false},
		{"two values", []Choice{is(page, one(1))}, []Choice{is(page, one(2))}, true},
		{"one value twice", []Choice{is(page, one(1))}, []Choice{is(page, one(1))}, false},
		{"ranges that meet", []Choice{is(page, RawRange{0, 4})}, []Choice{is(page, RawRange{4, 7})}, false},
		{"ranges side by side", []Choice{is(page, RawRange{0, 3})}, []Choice{is(page, RawRange{4, 7})}, true},
		{"combs", []Choice{is(page, one(0), one(2), one(4))}, []Choice{is(page, one(1), one(3), one(5))}, true},
		{"combs that meet", []Choice{is(page, one(0), one(2), one(5))}, []Choice{is(page, one(1), one(3), one(5))}, false},
		{"two selectors", []Choice{is(page, one(1))}, []Choice{is(mode, one(2))}, false},
		{"value and otherwise", []Choice{is(page, one(1))}, []Choice{not(page, one(1), one(2))}, true},
		{"value left to otherwise", []Choice{is(page, one(3))}, []Choice{not(page, one(1), one(2))}, false},
		{"two otherwise that leave nothing", []Choice{not(page, RawRange{0, 7})}, []Choice{not(page, RawRange{8, 15})}, true},
		{"two otherwise", []Choice{not(page, RawRange{0, 7})}, []Choice{not(page, RawRange{9, 15})}, false},
		{"nested, differing inside", []Choice{is(page, one(1)), is(mode, one(0))}, []Choice{is(page, one(1)), is(mode, one(1))}, true},
		{"nested, differing outside", []Choice{is(page, one(1)), is(mode, one(0))}, []Choice{is(page, one(2)), is(mode, one(0))}, true},
		{"nested and its outer branch", []Choice{is(page, one(1)), is(mode, one(0))}, []Choice{is(page, one(1))}, false},
	} {
		require.Equal(t, c.want, exclusive(c.a, c.b), c.name)
		require.Equal(t, c.want, exclusive(c.b, c.a), "%s, the other way round", c.name)
	}
}

// TestSelections compiles bodies in which page (4 bits at 0.7..0.4) and mode
// (4 bits at 0.3..0.0) are always there.
func TestSelections(t *testing.T) {
	for _, c := range []struct {
		name, body string
		code       diag.Code // "" is clean
	}{
		{"branches share bits", `select page { when 0 { a at 1.7..1.0 } when 1 { b at 1.7..1.0 } otherwise nothing }`, ""},
		{"otherwise shares bits", `select page { when 0 { a at 1.7..1.0 } otherwise { b at 1.7..1.0 } }`, ""},
		{"two selections of one selector", `select page { when 0 { a at 1.7..1.0 } otherwise nothing }
			select page { when 1 { b at 1.7..1.0 } otherwise nothing }`, ""},
		{"two selections of two selectors", `select page { when 0 { a at 1.7..1.0 } otherwise nothing }
			select mode { when 1 { b at 1.7..1.0 } otherwise nothing }`, diag.Overlap},
		{"otherwise and a value of its own", `select page { when 0 { a at 1.7..1.0 } otherwise nothing }
			select page { when 1 { c at 2.7..2.0 } otherwise { b at 1.7..1.0 } }`, diag.Overlap},
		{"always and chosen", `a at 1.7..1.0  select page { when 1 { b at 1.3..2.0 } otherwise nothing }`, diag.Overlap},
		{"within one branch", `select page { when 1 { a at 1.7..1.0  b at 1.0 flag } otherwise nothing }`, diag.Overlap},
		{"nested branches", `select page { when 1 { select mode { when 0 { a at 1.7..1.0 } otherwise { b at 1.7..1.0 } } } otherwise { c at 1.7..1.0 } }`, ""},
		{"outer member and nested one", `select page { when 1 { c at 1.0 flag  select mode { when 0 { a at 1.7..1.0 } otherwise nothing } } otherwise nothing }`, diag.Overlap},
		{"selector in an outer branch", `select page { when 1 { sub at 1.7..1.0  select sub { when 7 { a at 2.7..2.0 } otherwise unknown } } otherwise nothing }`, ""},
		{"selection before its selector", `select late { when 7 { a at 2.7..2.0 } otherwise unknown }  late at 1.7..1.0`, ""},
		{"selector of a sister selection, same value", `select page { when 1 { sub at 1.7..1.0 } otherwise nothing }
			select page { when 1 { select sub { when 7 { a at 2.7..2.0 } otherwise unknown } } otherwise nothing }`, ""},
		{"selector of a sister selection, more values", `select page { when 1 { sub at 1.7..1.0 } otherwise nothing }
			select page { when 1..2 { select sub { when 7 { a at 2.7..2.0 } otherwise unknown } } otherwise nothing }`, diag.SelectorAbsent},
		{"unused in one branch, used in another", `select page { when 0 { unused 1.7..1.0 } when 1 { b at 1.7..1.0 } otherwise nothing }`, ""},
		{"unused always, used in a branch", `unused 1.7..1.0  select page { when 1 { b at 1.7..1.0 } otherwise nothing }`, diag.UnusedOverlap},
		{"exhausted by ones", `select page { when 0..ones - 1 { a at 1.7..1.0 } when ones { b at 1.7..1.0 } }`, ""},
		{"one value missing", `select page { when 0..ones - 2 { a at 1.7..1.0 } when ones { b at 1.7..1.0 } }`, diag.OtherwiseMissing},
	} {
		t.Run(c.name, func(t *testing.T) {
			text := `busloom 1
bus chassis 500 kbit/s
ecu Brake on chassis
ecu Cluster on chassis
message Test 0x100 on chassis, 3 bytes {
  from Brake to Cluster
  page at 0.7..0.4
  mode at 0.3..0.0
  ` + c.body + `
}
`
			network, list := Compile(MapFiles{"test.bus": text}, "test.bus")
			var found []diag.Code
			for _, d := range list.Sorted() {
				if d.Severity == diag.Error {
					found = append(found, d.Code)
				}
			}
			if c.code != "" {
				require.Equal(t, []diag.Code{c.code}, found, render(t, list))
				return
			}
			require.Empty(t, found, render(t, list))
			require.NotNil(t, network)
			for _, s := range network.Messages[0].Signals {
				for i, w := range s.When {
					require.LessOrEqual(t, len(w.Selector.When), i, "the selector is there before its choice")
				}
			}
		})
	}
}
