package bits

import (
	"fmt"
	"strconv"
	"strings"
)

// Parse reads what Place.String writes, such as "0.1..0.0 then 4.7..4.0". It
// does not check that the place is legal (Check does).
func Parse(text string) (Place, error) {
	var p Place
	for part := range strings.SplitSeq(text, " then ") {
		heavy, light, isRun := strings.Cut(part, "..")
		h, err := parseBit(heavy)
		if err != nil {
			return Place{}, err
		}
		r := Run{Heavy: h, Light: h}
		if isRun {
			if r.Light, err = parseBit(light); err != nil {
				return Place{}, err
			}
		}
		p.Runs = append(p.Runs, r)
	}
	return p, nil
}

func parseBit(text string) (Bit, error) {
	whole, bit, ok := strings.Cut(text, ".")
	b, err1 := strconv.ParseUint(whole, 10, 16)
	i, err2 := strconv.ParseUint(bit, 10, 16)
	at := Bit{Byte: int(b), Bit: int(i)}
	// One way to write each position: no leading zeros.
	if !ok || err1 != nil || err2 != nil || at.String() != text {
		return Bit{}, fmt.Errorf("%q is not a position such as 0.7", text)
	}
	return at, nil
}
