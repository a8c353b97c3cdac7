package quantity

// Dimension is the kind of a quantity: what its unit may be.
type Dimension int

// The dimensions known to the program, each with its SI unit.
const (
	Dimensionless     Dimension = iota // 1
	Fraction                           // 1, also written in %
	Length                             // m
	Time                               // s
	Frequency                          // Hz
	Temperature                        // K
	Viscosity                          // Pa s, dynamic
	Density                            // kg/m3
	Power                              // W
	Voltage                            // V
	Count                              // counts of a digitiser
	Pixel                              // px
	LengthPerVoltage                   // m/V
	LengthPerCount                     // m/count
	LengthPerPixel                     // m/px
	HeatingPerPower                    // K/W
	Molality                           // mol/kg
	Velocity                           // m/s
	Stiffness                          // N/m
	Drag                               // kg/s
	Diffusion                          // m2/s
	Force                              // N
	Energy                             // J
	StiffnessPerPower                  // N/(m W)
	Memory                             // B, bytes
	dimensionCount                     // number of dimensions, not one of them
)

// exponents are the powers of m, kg, s, K, mol, V, count, px and B in a unit. The
// volt stands as a base unit of its own: no setting links it to the watt.
type exponents [9]int

// Indexes into exponents.
const (
	metre = iota
	kilogram
	second
	kelvin
	mole
	volt
	count
	pixel
	octet
)

// dimensionInfo says how a dimension is named in a message, what an example of
// it looks like, which unit it has in SI, and what its exponents are.
type dimensionInfo struct {
	name, example, unit string
	powers              exponents
}

var dimensions = [dimensionCount]dimensionInfo{
	Dimensionless:     {"a plain number", "0.25", "1", exponents{}},
	Fraction:          {"a fraction", "3 %", "1", exponents{}},
	Length:            {"a length", "1.02(3) um", "m", exponents{metre: 1}},
	Time:              {"a time", "0.4 ms", "s", exponents{second: 1}},
	Frequency:         {"a frequency", "2 kHz", "Hz", exponents{second: -1}},
	Temperature:       {"a temperature", "24.5(5) C", "K", exponents{kelvin: 1}},
	Viscosity:         {"a viscosity", "0.95(2) mPa s", "Pa s", exponents{kilogram: 1, metre: -1, second: -1}},
	Density:           {"a density", "1.05 g/cm3", "kg/m3", exponents{kilogram: 1, metre: -3}},
	Power:             {"a power", "48 mW", "W", exponents{kilogram: 1, metre: 2, second: -3}},
	Voltage:           {"a voltage", "12 mV", "V", exponents{volt: 1}},
	Count:             {"a number of counts", "12 counts", "count", exponents{count: 1}},
	Pixel:             {"a number of pixels", "0.1 px", "px", exponents{pixel: 1}},
	LengthPerVoltage:  {"a length per voltage", "1.31(4) um/V", "m/V", exponents{metre: 1, volt: -1}},
	LengthPerCount:    {"a length per count", "0.32(1) nm/count", "m/count", exponents{metre: 1, count: -1}},
	LengthPerPixel:    {"a length per pixel", "65.0(3) nm/px", "m/px", exponents{metre: 1, pixel: -1}},
	HeatingPerPower:   {"a heating per power", "36(4) K/W", "K/W", exponents{kelvin: 1, kilogram: -1, metre: -2, second: 3}},
	Molality:          {"a molality", "0.15 mol/kg", "mol/kg", exponents{mole: 1, kilogram: -1}},
	Velocity:          {"a velocity", "20 um/s", "m/s", exponents{metre: 1, second: -1}},
	Stiffness:         {"a stiffness", "52.3(11) pN/um", "N/m", exponents{kilogram: 1, second: -2}},
	Drag:              {"a drag coefficient", "8.9(3) nN s/m", "N s/m", exponents{kilogram: 1, second: -1}},
	Diffusion:         {"a diffusion coefficient", "0.45(2) um2/s", "m2/s", exponents{metre: 2, second: -1}},
	Force:             {"a force", "1.5 pN", "N", exponents{kilogram: 1, metre: 1, second: -2}},
	Energy:            {"an energy", "4.1e-21 J", "J", exponents{kilogram: 1, metre: 2, second: -2}},
	Memory:            {"a size of memory", "4 GB", "B", exponents{octet: 1}},
	StiffnessPerPower: {"a stiffness per power", "1.1(1) pN/um/mW", "N/m/W", exponents{metre: -2, second: 1}},
}

// valid reports whether d is one of the dimensions above.
func (d Dimension) valid() bool { return d >= 0 && d < dimensionCount }

// String names the dimension with its article, as messages do: "a length".
func (d Dimension) String() string {
	if !d.valid() {
		return "an unknown dimension"
	}
	return dimensions[d].name
}

// Example returns a quantity of this dimension as a user would write it.
func (d Dimension) Example() string {
	if !d.valid() {
		return ""
	}
	return dimensions[d].example
}

// SIUnit returns the SI unit in which values of this dimension are held, in
// the spelling that Parse reads; "1" for a plain number.
func (d Dimension) SIUnit() string {
	if !d.valid() {
		return ""
	}
	return dimensions[d].unit
}

// nameOf describes a combination of units that is none of the allowed ones:
// the dimension that has these exponents, or "" when none has.
func nameOf(powers exponents) string {
	for _, info := range dimensions {
		if info.powers == powers {
			return info.name
		}
	}
	return ""
}
