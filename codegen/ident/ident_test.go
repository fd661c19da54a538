package ident

import (
	"go/token"
	"testing"

	"github.com/stretchr/testify/require"
	"pgregory.net/rapid"
)

func TestIdentifiers(t *testing.T) {
	for _, c := range []struct{ path, golang, c string }{
		{"wheel[front_left].speed", "WheelFrontLeftSpeed", "wheel_front_left_speed"},
		{"WheelSpeeds", "WheelSpeeds", "wheel_speeds"},
		{"cell[12]", "Cell12", "cell_12"},
		{"cell[1].2", "Cell1_2", "cell_1_2"},
		{"ABSState", "ABSState", "abs_state"},
		{"Ntc2k5", "Ntc2k5", "ntc2k5"},
		{"default", "Default", "default_"},
		{"Class", "Class", "class_"},
		{"not", "Not", "not_"},
		{"_hidden", "Hidden", "hidden"},
		{"__", "X", "x"},
		{"2nd", "X2nd", "x2nd"},
		{"a__b", "AB", "a_b"},
		{"WheelSpeeds.crc", "WheelSpeedsCrc", "wheel_speeds_crc"},
	} {
		require.Equal(t, c.golang, Go(c.path), c.path)
		require.Equal(t, c.c, C(c.path), c.path)
	}
}

// Whatever the path, the results are identifiers: go/token is the judge for
// Go, the grammar of ISO/IEC 9899 6.4.2.1 for C.
func TestAlwaysIdentifiers(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		path := rapid.StringMatching(`[A-Za-z_0-9.\[\]]{0,20}`).Draw(t, "path")
		g, c := Go(path), C(path)
		require.True(t, token.IsIdentifier(g) && token.IsExported(g), g)
		require.Regexp(t, `^[a-z][a-z0-9_]*$`, c)
		require.False(t, reserved[c])
	})
}
