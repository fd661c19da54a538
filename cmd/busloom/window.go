package main

import (
	"math/big"
	"strings"

	"busloom/pipeline"
	"busloom/unit"
)

// parseWindow reads --from and --to: seconds of the capture's clock, or
// +seconds after its first record; the unit s may stand behind them.
func parseWindow(from, to string) (pipeline.Window, error) {
	var w pipeline.Window
	var err error
	if w.From, err = parseMoment("from", from); err != nil {
		return w, err
	}
	if w.To, err = parseMoment("to", to); err != nil {
		return w, err
	}
	if w.From != nil && w.To != nil && w.From.SinceZero == w.To.SinceZero && w.From.Time > w.To.Time {
		return w, usageError("--from %s is later than --to %s", from, to)
	}
	return w, nil
}

func parseMoment(flag, text string) (*pipeline.Moment, error) {
	if text == "" {
		return nil, nil
	}
	digits, since := strings.CutPrefix(text, "+")
	seconds, err := unit.ParseNumber(strings.TrimSuffix(digits, "s"))
	if err != nil {
		return nil, usageError("--%s %s: a time is seconds, such as 12.5, or +12.5 after the first record", flag, text)
	}
	ns := unit.RoundScaled(new(big.Rat).Set(seconds), 9)
	if !ns.IsInt64() {
		return nil, usageError("--%s %s is out of range", flag, text)
	}
	return &pipeline.Moment{Time: ns.Int64(), SinceZero: since}, nil
}
