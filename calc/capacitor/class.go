package capacitor

import "strings"

// Kind is the family of a dielectric. The zero value is no kind.
type Kind int

// Kinds of dielectric.
const (
	Unspecified Kind = iota // no kind
	ClassOne                // temperature-compensating ceramic
	ClassTwo                // high-permittivity ceramic
	Film                    // plastic film
	Aluminium               // aluminium electrolytic
	Tantalum                // solid tantalum
)

// String returns the name of the kind.
func (k Kind) String() string {
	switch k {
	case ClassOne:
		return "class 1 ceramic"
	case ClassTwo:
		return "class 2 ceramic"
	case Film:
		return "film"
	case Aluminium:
		return "aluminium electrolytic"
	case Tantalum:
		return "tantalum"
	}
	return "unspecified"
}

// Class is a dielectric class with its limits over temperature, relative to the
// capacitance at 25 °C (20 °C for electrolytics).
type Class struct {
	Code            string  // class code in its usual spelling
	Kind            Kind    // family of the dielectric
	TemperatureLow  float64 // lowest temperature of the range [degC]
	TemperatureHigh float64 // highest temperature of the range [degC]
	ChangeLow       float64 // lower limit of the change in the range, 0 or negative [1]
	ChangeHigh      float64 // upper limit of the change in the range, 0 or positive [1]
	AgeingLow       float64 // smallest typical loss per decade of time [1]
	AgeingHigh      float64 // largest typical loss per decade of time [1]
	Source          string  // bibliography key of the temperature limits
}

// Covers reports whether the class is specified over the whole span from low to
// high [degC]. It is false when either is NaN.
func (c Class) Covers(low, high float64) bool {
	return low >= c.TemperatureLow && high <= c.TemperatureHigh && low <= high
}

// ParseClass reads a class code, in either case: a class 2 ceramic code of
// EIA-198 (letter, digit, letter: X7R), C0G or NP0 (also with the letter O),
// FILM, ALUMINIUM or ALUMINUM, TANTALUM.
//
// Class 2 codes carry their own limits [slaa701b, holy-stone]. C0G allows
// ±30 ppm/K; over -55 to 125 °C the farther end, 100 K from 25 °C, makes ±0.3 %.
// Its ageing is 0; class 2 is that of ageing below. Film and aluminium limits
// are usual for general-purpose parts [common-practice], tantalum ones from
// memory [mil-prf-55365]; the three have no logarithmic ageing.
func ParseClass(code string) (Class, bool) {
	code = strings.ToUpper(strings.TrimSpace(code))
	switch code {
	case "C0G", "COG":
		return classOne("C0G"), true
	case "NP0", "NPO":
		return classOne("NP0"), true
	case "FILM":
		return Class{
			Code: "FILM", Kind: Film, TemperatureLow: -55, TemperatureHigh: 105,
			ChangeLow: -0.06, ChangeHigh: 0.06, Source: "common-practice",
		}, true
	case "ALUMINIUM", "ALUMINUM":
		return Class{
			Code: "ALUMINIUM", Kind: Aluminium, TemperatureLow: -40, TemperatureHigh: 85,
			ChangeLow: -0.30, ChangeHigh: 0.15, Source: "common-practice",
		}, true
	case "TANTALUM":
		return Class{
			Code: "TANTALUM", Kind: Tantalum, TemperatureLow: -55, TemperatureHigh: 125,
			ChangeLow: -0.10, ChangeHigh: 0.12, Source: "mil-prf-55365",
		}, true
	}
	return classTwo(code)
}

func classOne(code string) Class {
	const perKelvin, low, high, reference = 30e-6, -55.0, 125.0, 25.0
	limit := perKelvin * max(high-reference, reference-low)
	return Class{
		Code: code, Kind: ClassOne, TemperatureLow: low, TemperatureHigh: high,
		ChangeLow: -limit, ChangeHigh: limit, Source: "eia-198",
	}
}

// classTwo reads the three-character code of EIA-198.
func classTwo(code string) (Class, bool) {
	if len(code) != 3 {
		return Class{}, false
	}
	low, okLow := lowTemperature(code[0])
	high, okHigh := highTemperature(code[1])
	down, up, okChange := change(code[2])
	if !okLow || !okHigh || !okChange {
		return Class{}, false
	}
	slow, fast := ageing(code[2])
	return Class{
		Code: code, Kind: ClassTwo, TemperatureLow: low, TemperatureHigh: high,
		ChangeLow: down, ChangeHigh: up, AgeingLow: slow, AgeingHigh: fast, Source: "eia-198",
	}, true
}

// lowTemperature returns the lower end [degC] of a class 2 code's first letter.
func lowTemperature(letter byte) (float64, bool) {
	switch letter {
	case 'X':
		return -55, true
	case 'Y':
		return -30, true
	case 'Z':
		return 10, true
	}
	return 0, false
}

// highTemperature returns the upper end [degC] of a class 2 code's digit.
func highTemperature(digit byte) (float64, bool) {
	switch digit {
	case '2':
		return 45, true
	case '4':
		return 65, true
	case '5':
		return 85, true
	case '6':
		return 105, true
	case '7':
		return 125, true
	case '8':
		return 150, true
	case '9':
		return 200, true
	}
	return 0, false
}

// change returns the limits of the relative change over the temperature range
// of a class 2 code's last letter.
func change(letter byte) (low, high float64, ok bool) {
	switch letter {
	case 'A':
		return -0.010, 0.010, true
	case 'B':
		return -0.015, 0.015, true
	case 'C':
		return -0.022, 0.022, true
	case 'D':
		return -0.033, 0.033, true
	case 'E':
		return -0.047, 0.047, true
	case 'F':
		return -0.075, 0.075, true
	case 'P':
		return -0.10, 0.10, true
	case 'R':
		return -0.15, 0.15, true
	case 'S':
		return -0.22, 0.22, true
	case 'T':
		return -0.33, 0.22, true
	case 'U':
		return -0.56, 0.22, true
	case 'V':
		return -0.82, 0.22, true
	}
	return 0, 0, false
}

// ageing returns the typical loss per decade hour of a class 2 code's last
// letter: 2.5 to 3 % for X7R and X5R, 7 % for Y5V [holy-stone]. Ageing follows
// the permittivity, so letters tighter than R take R's figures and those
// between R and V the whole span of the two [common-practice].
func ageing(letter byte) (low, high float64) {
	switch {
	case letter <= 'R':
		return 0.025, 0.03
	case letter < 'V':
		return 0.025, 0.07
	}
	return 0.07, 0.07
}
