package unit

// Which prefixes a unit takes. Whole bits come in multiples only, so a slip
// such as mbit for Mbit is caught.
const (
	noPrefix  = ""
	siPrefix  = "pnumcdhkMG"
	multiples = "kMG"
)

// siPrefixes: SI Brochure, 9th edition (2019), table 7, from pico to giga.
var siPrefixes = map[byte]string{
	'p': "1e-12", 'n': "1e-9", 'u': "1e-6", 'm': "1e-3", 'c': "1e-2", 'd': "1e-1",
	'h': "1e2", 'k': "1e3", 'M': "1e6", 'G': "1e9",
}

// builtin are the units of the trade. Values: SI Brochure, 9th edition (2019),
// tables 2 (base), 4 (derived) and 8 (non-SI); bar: 8th edition (2006), table
// 8; byte: IEC 80000-13. Common practice: rpm is a turn of 360 deg a minute, Ah
// and Wh are an hour long, % and its kin are plain numbers.
var builtin = []struct {
	symbol   string
	dim      Dimension
	factor   string
	piPower  int
	prefixes string
}{
	{"m", "m", "1", 0, siPrefix},
	{"g", "kg", "1/1000", 0, siPrefix},
	{"t", "kg", "1000", 0, noPrefix},
	{"s", "s", "1", 0, siPrefix},
	{"min", "s", "60", 0, noPrefix},
	{"h", "s", "3600", 0, noPrefix},
	{"d", "s", "86400", 0, noPrefix},
	{"A", "A", "1", 0, siPrefix},
	{"K", "K", "1", 0, siPrefix},
	{"mol", "mol", "1", 0, siPrefix},
	{"cd", "cd", "1", 0, noPrefix},
	{"lx", "cd m^-2", "1", 0, siPrefix},
	{"deg", "deg", "1", 0, noPrefix},
	{"rad", "deg", "180", -1, siPrefix},
	{"turn", "deg", "360", 0, noPrefix},
	{"rpm", "deg s^-1", "6", 0, noPrefix},
	{"Hz", "s^-1", "1", 0, siPrefix},
	{"N", "kg m s^-2", "1", 0, siPrefix},
	{"Nm", "kg m^2 s^-2", "1", 0, siPrefix},
	{"Pa", "kg m^-1 s^-2", "1", 0, siPrefix},
	{"bar", "kg m^-1 s^-2", "100000", 0, siPrefix},
	{"J", "kg m^2 s^-2", "1", 0, siPrefix},
	{"W", "kg m^2 s^-3", "1", 0, siPrefix},
	{"Wh", "kg m^2 s^-2", "3600", 0, siPrefix},
	{"V", "A^-1 kg m^2 s^-3", "1", 0, siPrefix},
	{"ohm", "A^-2 kg m^2 s^-3", "1", 0, siPrefix},
	{"F", "A^2 kg^-1 m^-2 s^4", "1", 0, siPrefix},
	{"H", "A^-2 kg m^2 s^-2", "1", 0, siPrefix},
	{"C", "A s", "1", 0, siPrefix},
	{"Ah", "A s", "3600", 0, siPrefix},
	{"T", "A^-1 kg s^-2", "1", 0, siPrefix},
	{"L", "m^3", "1/1000", 0, siPrefix},
	{"bit", "bit", "1", 0, multiples},
	{"byte", "bit", "8", 0, multiples},
	{"%", "", "1/100", 0, noPrefix},
	{"permille", "", "1/1000", 0, noPrefix},
	{"ppm", "", "1/1000000", 0, noPrefix},
}

// common are the prefixed and composite symbols worth suggesting.
var common = []string{"km", "mm", "cm", "um", "kg", "mg", "ms", "us", "ns", "mA", "kHz", "MHz", "kN", "kPa", "MPa", "hPa",
	"mbar", "kJ", "kW", "kWh", "mV", "kV", "kohm", "uF", "nF", "mAh", "mL", "kbit", "Mbit", "km/h", "m/s", "m/s^2",
	"g/s", "kg/h", "L/h", "rad/s", "deg/s"}

// slips are spellings that letter case doesn't mend, in small letters.
var slips = map[string]string{
	"kmh": "km/h", "kph": "km/h", "kmph": "km/h", "mps": "m/s", "kbps": "kbit/s", "mbps": "Mbit/s",
	"msec": "ms", "sec": "s", "second": "s", "seconds": "s", "hr": "h", "hour": "h", "hours": "h", "day": "d", "days": "d",
	"gram": "g", "litre": "L", "litres": "L", "liter": "L", "lux": "lx", "rev": "turn", "hertz": "Hz",
	"degree": "deg", "degrees": "deg", "celsius": "degC", "kelvin": "K",
	"volt": "V", "volts": "V", "amp": "A", "ampere": "A", "bits": "bit", "bytes": "byte", "percent": "%", "pct": "%",
}
