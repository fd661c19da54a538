package heron_test

import (
	"bytes"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"

	"busloom/diag"
	"busloom/heron"
	"busloom/schema"
)

var busNames = map[string]string{"can0": "chassis", "can1": "powertrain", "can2": "body"}

func description(t *testing.T) *schema.Network {
	t.Helper()
	net, problems := schema.Compile(schema.DiskFiles(), "../schemas/heron.bus")
	var text bytes.Buffer
	require.NoError(t, diag.Render(&text, problems.Sorted(), diag.Style{Notes: true}))
	require.Empty(t, text.String(), "the description has nothing to complain about, not even notes")
	require.NotNil(t, net)
	return net
}

// The description is laid out as the language's formatter does it.
func TestDescriptionIsFormatted(t *testing.T) {
	count := 0
	require.NoError(t, filepath.WalkDir("../schemas", func(path string, entry fs.DirEntry, err error) error {
		if err != nil || filepath.Ext(path) != ".bus" {
			return err
		}
		text, err := os.ReadFile(path)
		require.NoError(t, err)
		formatted, ok := schema.Format(diag.NewFile(path, text), &diag.List{})
		require.True(t, ok, path)
		require.Equal(t, string(formatted), string(text))
		count++
		return nil
	}))
	require.Greater(t, count, 10)
}

// The van is big enough to be taken seriously, and has every kind of sensor
// that the demo promises.
func TestDescription(t *testing.T) {
	net := description(t)
	require.Equal(t, "Heron", net.Name)
	require.Len(t, net.Buses, 3)
	require.GreaterOrEqual(t, len(net.ECUs), 10)
	require.GreaterOrEqual(t, len(net.Messages), 40)
	methods := map[string]bool{}
	have := map[string]bool{}
	for _, m := range net.Messages {
		for _, s := range m.Signals {
			have[m.Name+"."+s.Name] = true
			if s.Checksum != nil {
				methods[s.Checksum.Method] = true
			}
		}
	}
	require.GreaterOrEqual(t, len(methods), 11, "%v", methods)
	for _, path := range []string{
		"WheelSpeeds.wheel[front_right].speed", "Crankshaft.sync", "Camshafts.cam[intake].speed",
		"PedalTracks.track[first].volts", "PedalTracks.track[second].volts", "FuelTank.left", "AirPath.intake",
		"EngineState.coolant", "AirPath.flow", "Ignition.knock", "Mixture.probe", "Mixture.heater", "Ignition.advance",
		"Ignition.dwell", "Injection.on_time", "Injection.rail", "Injection.resting_two", "ValveTrain.intake_timing",
		"ValveTrain.lift", "Throttle.position", "Mixture.loop", "Mixture.short_trim", "Mixture.long_trim",
		"EngineFaults.rest", "DiagnosticAnswer.code[1].letter", "EngineLamps.engine", "DriveChoice.mode", "Throttle.map",
		"RoadSpeed.speed", "ClusterState.speed",
	} {
		require.True(t, have[path], path)
	}
}

// Every frame of every capture is described with its exact length, but for the
// tester's requests to all units.
func TestCapturesAreDescribed(t *testing.T) {
	net := description(t)
	find := func(bus string, extended bool, id uint64) *schema.Message {
		for _, m := range net.Messages {
			if m.Bus.Name == bus && m.ID.Extended == extended && uint32(id)&m.ID.Mask == m.ID.Value {
				return m
			}
		}
		return nil
	}
	met := map[*schema.Message]bool{}
	for _, s := range heron.Scenarios() {
		var out bytes.Buffer
		require.NoError(t, heron.Write(&out, s, heron.Options{}))
		seen := map[string]bool{}
		for line := range strings.Lines(out.String()) {
			_, record, _ := strings.Cut(strings.TrimSpace(line), " ")
			head, data, _ := strings.Cut(record, "#")
			fd := strings.HasPrefix(data, "#")
			if fd {
				data = data[2:]
			}
			key := fmt.Sprint(head, len(data), fd)
			if seen[key] || data == "R8" || strings.HasSuffix(head, " 20000088") {
				continue
			}
			seen[key] = true
			bus, id, _ := strings.Cut(head, " ")
			number, err := strconv.ParseUint(id, 16, 32)
			require.NoError(t, err)
			m := find(busNames[bus], len(id) == 8, number)
			if id == "7DF" {
				require.Nil(t, m)
				continue
			}
			require.NotNil(t, m, "%s: %s isn't described", s, head)
			met[m] = true
			require.Equal(t, m.FD, fd, m.Name)
			if m.AtLeast {
				require.GreaterOrEqual(t, len(data)/2, m.Size, m.Name)
			} else {
				require.Equal(t, m.Size, len(data)/2, m.Name)
			}
		}
	}
	for _, m := range net.Messages {
		require.True(t, met[m], "no capture has %s on %s", m.Name, m.Bus.Name)
	}
}
