// Package heron is a small deterministic model of the delivery van that
// schemas/heron.bus describes, and the traffic its control units would put on
// their buses. It makes the captures of testdata/heron and of the benchmarks,
// and tells as data what happened in them (Tell), so that decoded signals can
// be held against the model.
//
// The package has its own plain encoder and shares no code with the rest of
// Busloom: what it writes is a second opinion on the bit layout.
//
// The same bytes come out on every machine: the random numbers are its own, no
// function of package math with a machine's own code is used other than Sqrt,
// and every product that is added to something is rounded first (a float64
// conversion), so that no compiler may fuse the two.
package heron
