package medium

import (
	"fmt"
	"math"
	"strconv"
	"strings"
)

// Fluid is one fluid of known composition. ParseFluid makes one; the zero value
// is no fluid, and At refuses it.
type Fluid struct {
	// Name is the fluid as ParseFluid reads it, in its canonical spelling, such
	// as "glycerol 20 %".
	Name string

	solution *solution
	amount   float64 // mass fraction, or molality [mol/kg]; 0 for a pure fluid
}

// solution is one entry of the table of fluids.
type solution struct {
	name      string
	unit      string  // "%", "mol/kg", or empty for a pure fluid
	most      float64 // largest amount, in the unit that is written
	example   string
	low, high float64 // range of temperature [K]
	evaluate  func(kelvin, amount float64) state
	source    string
}

// state is what a correlation says at one temperature and one composition.
type state struct {
	viscosity, viscosityU float64 // Pa s, relative standard uncertainty
	density, densityU     float64 // kg/m3, relative standard uncertainty
}

// solutions are the fluids, in the order in which they are listed to users.
var solutions = []*solution{
	{name: "water", example: "water", low: 253.15, high: 383.15, evaluate: water,
		source: "IAPWS SR6-08(2011), Patek et al. 2009"},
	{name: "heavy water", example: "heavy water", low: 276.65, high: 373.15, evaluate: heavyWater,
		source: "IAPWS 1984 revised 2007, brought to IAPWS R17-20 (viscosity), Kell 1967 (density)"},
	{name: "glycerol", unit: "%", most: 100, example: "glycerol 20 %",
		low: zeroCelsius, high: 373.15, evaluate: glycerol,
		source: "Cheng 2008 (viscosity), Volk and Kaehler 2018 (density)"},
	{name: "sucrose", unit: "%", most: 65, example: "sucrose 10 %",
		low: zeroCelsius, high: 333.15, evaluate: sucrose,
		source: "Barber 1966"},
	{name: "saline", unit: "mol/kg", most: 6, example: "saline 0.15 mol/kg",
		low: 293.15, high: 373.15, evaluate: saline,
		source: "Kestin, Khalifa and Correia 1981 (viscosity), Laliberte and Cooper 2004 (density)"},
}

// Examples returns one spelling of each fluid that ParseFluid accepts.
func Examples() []string {
	examples := make([]string, len(solutions))
	for i, s := range solutions {
		examples[i] = s.example
	}
	return examples
}

// ParseFluid reads a fluid: "water", "heavy water", "glycerol 20 %" and
// "sucrose 10 %" (mass of solute per mass of solution), or "saline 0.15 mol/kg"
// (sodium chloride, mol per kg of water).
//
// Capitals and the amount of space do not matter; nothing else is forgiven. It
// returns an error that names the text and a remedy when the fluid is unknown
// (with the nearest known name, and all of them), when the amount or its unit
// is missing or superfluous, or when the amount is not a plain decimal number
// above zero and within the range of the correlation.
func ParseFluid(text string) (Fluid, error) {
	words := strings.ToLower(strings.Join(strings.Fields(text), " "))
	for _, s := range solutions {
		if rest, ok := strings.CutPrefix(words, s.name); ok && (rest == "" || rest[0] == ' ') {
			return s.parseAmount(text, strings.TrimSpace(rest))
		}
	}
	return Fluid{}, unknown(text, words)
}

// parseAmount reads what follows the name of the solution.
func (s *solution) parseAmount(text, rest string) (Fluid, error) {
	if s.unit == "" {
		if rest != "" {
			return Fluid{}, fmt.Errorf("fluid %q has an amount, and %s takes none: write %q", text, s.name, s.example)
		}
		return Fluid{Name: s.name, solution: s}, nil
	}
	number, ok := strings.CutSuffix(rest, s.unit)
	number = strings.TrimSpace(number)
	if !ok || number == "" {
		return Fluid{}, fmt.Errorf("fluid %q has no amount in %s: write it like %q", text, s.unit, s.example)
	}
	value, err := decimal(number)
	if err != nil {
		return Fluid{}, fmt.Errorf("fluid %q has an amount that is not a plain decimal number: write it like %q", text, s.example)
	}
	if value <= 0 {
		return Fluid{}, fmt.Errorf("fluid %q is no solution: write \"water\"", text)
	}
	if value > s.most {
		return Fluid{}, fmt.Errorf("fluid %q is above %g %s, the most that the correlation for %s covers: give the viscosity itself",
			text, s.most, s.unit, s.name)
	}
	amount := value
	if s.unit == "%" {
		amount = value / 100
	}
	name := s.name + " " + strconv.FormatFloat(value, 'g', -1, 64) + " " + s.unit
	return Fluid{Name: name, solution: s, amount: amount}, nil
}

// decimal reads digits with at most one point: no sign, exponent, hexadecimal,
// underscore or infinity, all of which strconv.ParseFloat takes.
func decimal(text string) (float64, error) {
	if strings.Trim(text, "0123456789.") != "" {
		return math.NaN(), strconv.ErrSyntax
	}
	return strconv.ParseFloat(text, 64)
}

// aliases are usual names of the fluids that are not accepted, with the name to use.
var aliases = map[string]string{
	"h2o": "water", "buffer": "water", "d2o": "heavy water", "heavywater": "heavy water",
	"glycerin": "glycerol", "glycerine": "glycerol", "sugar": "sucrose", "saccharose": "sucrose",
	"nacl": "saline", "salt": "saline", "pbs": "saline", "salt water": "saline",
}

// unknown says that no fluid has this name, which one was probably meant, and
// which ones there are.
func unknown(text, words string) error {
	list := `"` + strings.Join(Examples(), `", "`) + `"`
	if words == "" {
		return fmt.Errorf("fluid is empty: write one of %s", list)
	}
	name, _, _ := strings.Cut(words, " ")
	if _, ok := aliases[name]; !ok {
		name = words
		if i := strings.IndexAny(words, "0123456789"); i > 0 {
			name = strings.TrimSpace(words[:i])
		}
	}
	best, distance := nearest(name, words)
	if distance > 2 {
		return fmt.Errorf("fluid %q is not known: write one of %s, or give the viscosity itself", text, list)
	}
	return fmt.Errorf("fluid %q is not known: did you mean %q? (known: %s)", text, best.example, list)
}

// nearest returns the solution whose name is the fewest edits away from either spelling.
func nearest(spellings ...string) (*solution, int) {
	var best *solution
	least := math.MaxInt
	for _, s := range solutions {
		for _, spelling := range spellings {
			d := edits(spelling, s.name)
			if aliases[spelling] == s.name {
				d = 0
			}
			if d < least {
				best, least = s, d
			}
		}
	}
	return best, least
}

// edits is the Levenshtein distance between two words.
func edits(a, b string) int {
	row := make([]int, len(b)+1)
	for j := range row {
		row[j] = j
	}
	for i := range len(a) {
		diagonal := row[0]
		row[0] = i + 1
		for j := range len(b) {
			cost := diagonal
			if a[i] != b[j] {
				cost++
			}
			diagonal = row[j+1]
			row[j+1] = min(cost, row[j]+1, row[j+1]+1)
		}
	}
	return row[len(b)]
}
