package decode

import (
	"os"
	"strings"
	"testing"

	"busloom/capture"
	"busloom/diag"
	"busloom/frame"
	"busloom/schema"

	"github.com/stretchr/testify/require"
)

const twoBuses = `busloom 1
network Two
bus chassis 500 kbit/s
bus body 125 kbit/s
ecu A on chassis, body
ecu B on chassis, body
message Speed 0x100 on chassis, 2 bytes {
  from A to B
  wheel at 0.7..1.0 = raw * 0.01 km/h
}
message Doors 0x100 on body, 2 bytes {
  from A to B
  page at 0.7..0.0
  select page {
    when 1 { left at 1.7..1.0 }
    when 2..4 { right at 1.7..1.0 }
    otherwise { rest at 1.7..1.0 bytes }
  }
}
`

func TestOptionsAreChecked(t *testing.T) {
	network := compile(t, twoBuses)
	for _, c := range []struct {
		opts Options
		want string
	}{
		{Options{Buses: map[string]string{"can0": "chasis"}}, "did you mean chassis?"},
		{Options{Only: []string{"Sped"}}, "did you mean Speed?"},
		{Options{Only: []string{"Speed.whel"}}, "did you mean wheel?"},
		{Options{Only: []string{"."}}, "empty"},
		{Options{Units: map[string]string{"km/h": "kmh"}}, "there is no unit kmh"},
		{Options{Units: map[string]string{"km/h": "V"}}, "different dimensions"},
		{Options{Units: map[string]string{"V": "mV"}}, "no wanted signal has the unit V"},
	} {
		_, err := NewPlan(network, c.opts)
		require.ErrorContains(t, err, c.want)
	}
}

func TestInterfacesAndBuses(t *testing.T) {
	network := compile(t, twoBuses)
	for _, c := range []struct {
		buses map[string]string
		iface string
		want  string // the message of 0x100, "" if unmapped
	}{
		{nil, "chassis", "Speed"},
		{nil, "body", "Doors"},
		{nil, "can0", ""},
		{map[string]string{"can0": "body"}, "can0", "Doors"},
		{map[string]string{"can0": "body"}, "chassis", "Speed"},
		{map[string]string{"chassis": "body"}, "chassis", "Doors"},
	} {
		p, err := NewPlan(network, Options{Buses: c.buses})
		require.NoError(t, err)
		p.Bind([]string{c.iface})
		var r Record
		p.Decode(received(t, "100", "0000"), &r)
		if c.want == "" {
			require.Equal(t, Unmapped, r.Class)
			continue
		}
		require.Equal(t, Decoded, r.Class)
		require.Equal(t, c.want, r.Message.Model.Name)
	}
}

func TestSelectionAndPatterns(t *testing.T) {
	for _, c := range []struct {
		only []string
		data string
		want map[string]string
	}{
		{nil, "0105", map[string]string{"page": "1", "left": "5"}},
		{nil, "0305", map[string]string{"page": "3", "right": "5"}},
		{nil, "0905", map[string]string{"page": "9", "rest": "05"}},
		{[]string{"Doors.right"}, "0305", map[string]string{"right": "5"}},
		{[]string{"*.r*t"}, "0905", map[string]string{"rest": "05"}},
		{[]string{"Doors.left", "Doors.page"}, "0905", map[string]string{"page": "9"}},
		{nil, "01", map[string]string{"page": "1", "left": "missing"}},
		{nil, "", map[string]string{"page": "missing"}},
	} {
		p, err := NewPlan(compile(t, twoBuses), Options{Only: c.only})
		require.NoError(t, err)
		p.Bind([]string{"body"})
		got, _ := values(t, p, received(t, "100", c.data))
		require.Equal(t, c.want, got)
	}
}

// 80.13 km/h must be 80.13, and in m/s what the SI definition of the hour
// gives: 8013/360 = 22.2583333...
func TestUnitsAreExact(t *testing.T) {
	p, err := NewPlan(compile(t, twoBuses), Options{})
	require.NoError(t, err)
	p.Bind([]string{"chassis"})
	got, _ := values(t, p, received(t, "100", "1F4D"))
	require.Equal(t, "80.13 km/h", got["wheel"])
	p, err = NewPlan(compile(t, twoBuses), Options{Units: map[string]string{"km/h": "m/s"}})
	require.NoError(t, err)
	p.Bind([]string{"chassis"})
	got, _ = values(t, p, received(t, "100", "1F4D"))
	require.Equal(t, "22.2583 m/s", got["wheel"])
}

func TestGlob(t *testing.T) {
	for _, c := range []struct {
		pattern, text string
		want          bool
	}{
		{"*", "", true}, {"", "", true}, {"?", "", false}, {"a*b*c", "axxbyyc", true}, {"a*b*c", "axxbyy", false},
		{"wheel[*].speed", "wheel[front_left].speed", true}, {"*a*a*a*a*a*b", strings.Repeat("a", 200), false}, {"a?c", "abc", true},
	} {
		require.Equal(t, c.want, glob(c.pattern, c.text), "%s %s", c.pattern, c.text)
	}
}

// heronPlan is the demo network on its three buses.
func heronPlan(t testing.TB) *Plan {
	network, list := schema.Compile(schema.DiskFiles(), "../schemas/heron.bus")
	require.Zero(t, list.Count(diag.Error))
	p, err := NewPlan(network, Options{Buses: map[string]string{"can0": "chassis", "can1": "powertrain", "can2": "body"}})
	require.NoError(t, err)
	return p
}

func TestDecodingAllocatesNothing(t *testing.T) {
	p := heronPlan(t)
	frames, names := heronFrames(t)
	p.Bind(names)
	var r Record
	tracker := NewTracker(p)
	pass := func() {
		for i := range frames {
			p.Decode(&frames[i], &r)
			if r.Class == Decoded { // the map of unknown identifiers may grow
				tracker.Observe(&r)
			}
		}
	}
	pass()
	require.Zero(t, testing.AllocsPerRun(2, pass))
}

// heronFrames reads the demo's wet stop.
func heronFrames(t testing.TB) ([]frame.Frame, []string) {
	if _, err := os.Stat("../testdata/heron/wet_stop.log.gz"); err != nil {
		t.Fatalf("the demo's captures are missing: %v", err)
	}
	source, err := capture.Open("../testdata/heron/wet_stop.log.gz", capture.Options{})
	require.NoError(t, err)
	defer source.Close()
	var all []frame.Frame
	batch := make([]frame.Frame, 512)
	for {
		n, err := source.Read(batch)
		all = append(all, batch[:n]...)
		if err != nil {
			return all, source.Interfaces()
		}
	}
}

func BenchmarkDecode(b *testing.B) {
	p := heronPlan(b)
	frames, names := heronFrames(b)
	p.Bind(names)
	var r Record
	values := 0
	for b.Loop() {
		for i := range frames {
			p.Decode(&frames[i], &r)
			values += len(r.Values)
		}
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/float64(len(frames)), "ns/frame")
	b.ReportMetric(float64(values)/float64(b.N)/float64(len(frames)), "values/frame")
}
