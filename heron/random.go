package heron

// random is a xorshift64* generator (Marsaglia, "Xorshift RNGs", 2003; Vigna's
// multiplier).
type random uint64

func newRandom(seed uint64) random { return random(seed*0x9E3779B97F4A7C15 | 1) }

func (r *random) next() uint64 {
	x := uint64(*r)
	x ^= x >> 12
	x ^= x << 25
	x ^= x >> 27
	*r = random(x)
	return x * 0x2545F4914F6CDD1D
}

// below returns a whole number 0..n-1.
func (r *random) below(n int64) int64 { return int64((r.next() >> 33) * uint64(n) >> 31) }

// noise returns a number between -1 and 1, most often near 0.
func (r *random) noise() float64 {
	x := r.next()
	return float64(int64(x>>40)+int64(x&0xFFFFFF)-0xFFFFFF) / 0xFFFFFF
}

// peek is a number 0..n-1 that depends on the state but doesn't change it:
// what is sent must not change what happens.
func (r random) peek(n int64) int64 { return r.below(n) }
