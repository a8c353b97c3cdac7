package main

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"math"
	"math/rand/v2"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"time"

	"github.com/google/renameio/v2"

	"beadwell/calib/medium"
)

// folderRuns is the number of simulated folders unless another is asked for.
const folderRuns = 100

// FolderScore is the score of one number of a series over simulated folders. All fields are exported for the file of results.
type FolderScore struct {
	Folders, Failed int // simulated, and without the number
	Sum, Square     float64
	In95            int
	Scatter         float64 // sum of the squares of the errors [square of the unit of the number]
}

// folderNumber is one number that is scored.
type folderNumber struct{ run, kind, name, unit string }

// The runs of a folder of heights: as stated, with the diameter fitted, and with the scale fitted.
const (
	runPower    = "powers"
	runHeights  = "heights"
	runDiameter = "heights, --fit-diameter"
	runScale    = "heights, --height-scale fit"
)

// folderNumbers lists what is scored, in the order of the page; the unit is that of the scatter shown.
var folderNumbers = []folderNumber{
	{runPower, "stiffness against power", "stiffness per power, through the origin", "pN/(um mW)"},
	{runPower, "stiffness against power", "slope, with an intercept", "pN/(um mW)"},
	{runPower, "stiffness against power", "intercept", "pN/um"},
	{runHeights, "measured drag against height", "reading at the surface", "um"},
	{runHeights, "measured drag against height", "viscosity", "mPa s"},
	{runHeights, "corner frequency against height", "reading at the surface", "um"},
	{runHeights, "corner frequency against height", "change of ln(stiffness) with height", "1/um"},
	{runDiameter, "measured drag against height", "reading at the surface", "um"},
	{runDiameter, "measured drag against height", "radius of the bead", "um"},
	{runScale, "measured drag against height", "reading at the surface", "um"},
	{runScale, "measured drag against height", "height scale", "1"},
}

// shownPerSI turns the scatter into the unit of the page.
var shownPerSI = map[string]float64{"pN/(um mW)": 1e3, "pN/um": 1e6, "um": 1e6, "mPa s": 1e3, "1/um": 1e-6, "1": 1}

func (n folderNumber) key() string { return n.run + ": " + n.kind + ": " + n.name }

// What is stated of a folder; the truth of each is drawn about it.
const (
	folderDiameter, folderDiameterU       = 1.02, 0.02 // um
	folderTemperature, folderTemperatureU = 24.5, 0.5  // C
	folderScale, folderScaleU             = 0.82, 0.02
	folderMeterU                          = 0.03 // relative, of the power meter
	folderPerWatt                         = 0.5  // pN/(um mW)
	folderStiffness                       = 40   // pN/um, at all heights
)

// folderStudy runs the program on simulated folders.
type folderStudy struct {
	program, folder string
	known           map[string]*FolderScore
}

// runFolders simulates the folders that the file of results lacks, and writes the page.
func runFolders(ctx context.Context, p plan) (err error) {
	known, err := load[FolderScore](p.file)
	if err != nil {
		return err
	}
	folder, err := os.MkdirTemp("", "folders")
	if err != nil {
		return err
	}
	defer func() { err = errors.Join(err, os.RemoveAll(folder)) }()
	s := &folderStudy{program: filepath.Join(folder, "beadwell"), folder: folder, known: known}
	if p.runs == 0 {
		p.runs = folderRuns
	}
	done := s.done()
	if done < p.runs {
		if err := command(ctx, "go", "build", "-o", s.program, "./cmd/beadwell"); err != nil {
			return err
		}
	}
	for begin := time.Now(); done < p.runs && (p.limit == 0 || time.Since(begin) < p.limit); done++ {
		if err := s.one(ctx, uint64(done)); err != nil {
			return fmt.Errorf("folder %d: %w", done, err)
		}
		if err := save(p.file, known); err != nil {
			return err
		}
		fmt.Printf("%d folders, %s\n", done+1, time.Since(begin).Round(time.Second))
	}
	if p.write == "" {
		return nil
	}
	var page strings.Builder
	writeFolders(&page, known)
	return renameio.WriteFile(p.write, []byte(page.String()), 0o644)
}

// done is how many folders all numbers have been scored over.
func (s *folderStudy) done() int {
	least := math.MaxInt
	for _, n := range folderNumbers {
		score := s.known[n.key()]
		if score == nil {
			score = &FolderScore{}
			s.known[n.key()] = score
		}
		least = min(least, score.Folders)
	}
	return least
}

// command runs a command; its output is in the error. Statuses 3 and 5 of the program are answers.
func command(ctx context.Context, name string, arguments ...string) error {
	out, err := exec.CommandContext(ctx, name, arguments...).CombinedOutput()
	if exit := (*exec.ExitError)(nil); errors.As(err, &exit) && (exit.ExitCode() == 3 || exit.ExitCode() == 5) {
		return nil
	}
	if err != nil {
		return fmt.Errorf("%s %s: %w\n%s", name, strings.Join(arguments, " "), err, out)
	}
	return nil
}

// one simulates and scores both folders of a number.
func (s *folderStudy) one(ctx context.Context, number uint64) error {
	random := rand.New(rand.NewPCG(77, number))
	about := func(stated, u float64) float64 { return stated + u*random.NormFloat64() }
	diameter, temperature := about(folderDiameter, folderDiameterU), about(folderTemperature, folderTemperatureU)
	scale, meter, surface := about(folderScale, folderScaleU), about(1, folderMeterU), 1+3*random.Float64()
	water, err := medium.ParseFluid("water")
	if err != nil {
		return err
	}
	properties, err := water.At(temperature + 273.15)
	if err != nil {
		return err
	}
	simulate := func(path string, seed uint64, stiffness, height float64) error {
		return command(ctx, s.program, "simulate", "--out", path, "--axes", "x", "--rate", "20 kHz", "--duration", "1 s", "--noise", "1 nm", "--seed", fmt.Sprint(seed),
			"--stiffness", fmt.Sprintf("%.9g pN/um", stiffness), "--height", fmt.Sprintf("%.9g um", height), "--diameter", fmt.Sprintf("%.9g um", diameter),
			"--temperature", fmt.Sprintf("%.9g C", temperature))
	}
	heights, powers := filepath.Join(s.folder, "heights"), filepath.Join(s.folder, "powers")
	list := "file,height\n"
	for i, h := range []float64{0.70, 0.8, 0.95, 1.2, 1.6, 2.4, 4, 8} {
		name := fmt.Sprintf("h%d.csv", i)
		list += fmt.Sprintf("%s,%.6f um\n", name, surface+h/scale)
		if err := simulate(filepath.Join(heights, name), 100*number+uint64(i), folderStiffness, h); err != nil {
			return err
		}
	}
	stated := fmt.Sprintf("[bead]\ndiameter = \"%g +- %g um\"\n[medium]\ntemperature = \"%g +- %g C\"\n[recording]\nnoise = \"1 nm\"\n[chamber]\n",
		folderDiameter, folderDiameterU, folderTemperature, folderTemperatureU)
	if err := put(heights, list, stated+fmt.Sprintf("height_scale = \"%g +- %g\"\n", folderScale, folderScaleU)); err != nil {
		return err
	}
	list = "file,power\n"
	for i := range 6 {
		name, power := fmt.Sprintf("p%d.csv", i), 20*float64(i+1)
		list += fmt.Sprintf("%s,%.6f +- %.6f mW\n", name, power*meter, folderMeterU*power*meter)
		if err := simulate(filepath.Join(powers, name), 100*number+50+uint64(i), folderPerWatt*power, 8); err != nil {
			return err
		}
	}
	if err := put(powers, list, stated+"height = \"8 um\"\n"); err != nil {
		return err
	}
	truths := map[string]float64{
		"stiffness per power, through the origin": folderPerWatt * 1e-3, "slope, with an intercept": folderPerWatt * 1e-3, "intercept": 0,
		"reading at the surface": surface * 1e-6, "viscosity": properties.Viscosity, "change of ln(stiffness) with height": 0,
		"radius of the bead": diameter / 2 * 1e-6, "height scale": scale,
	}
	for _, run := range []struct {
		name      string
		arguments []string
	}{
		{runPower, []string{"batch", powers}},
		{runHeights, []string{"batch", heights, "--stiffness-slope", "fit"}},
		{runDiameter, []string{"batch", heights, "--fit-diameter"}},
		{runScale, []string{"batch", heights, "--height-scale", "fit"}},
	} {
		out := filepath.Join(s.folder, "out-"+run.arguments[1][len(s.folder)+1:])
		if err := command(ctx, s.program, append(run.arguments, "--out", out, "--reports", "none", "--quiet")...); err != nil {
			return err
		}
		if err := s.score(run.name, filepath.Join(out, "summary.json"), truths); err != nil {
			return err
		}
	}
	return errors.Join(os.RemoveAll(heights), os.RemoveAll(powers))
}

// put writes the track list and the settings of a folder.
func put(folder, list, settings string) error {
	return errors.Join(os.WriteFile(filepath.Join(folder, "tracks.csv"), []byte(list), 0o644), os.WriteFile(filepath.Join(folder, "session.toml"), []byte(settings), 0o644))
}

// score adds the numbers of one summary.
func (s *folderStudy) score(run, path string, truths map[string]float64) error {
	text, err := os.ReadFile(path)
	if err != nil {
		return err
	}
	var summary struct {
		Series []struct {
			Kind   string
			Values []struct {
				Name            string
				Value, Combined *float64
				Interval        [2]*float64 `json:"interval_95"`
			}
		}
	}
	if err := json.Unmarshal(text, &summary); err != nil {
		return err
	}
	for _, n := range folderNumbers {
		if n.run != run {
			continue
		}
		score, found := s.known[n.key()], false
		score.Folders++
		for _, series := range summary.Series {
			for _, v := range series.Values {
				if series.Kind != n.kind || v.Name != n.name || v.Value == nil || v.Combined == nil || v.Interval[0] == nil || v.Interval[1] == nil {
					continue
				}
				found = true
				score.add(*v.Value, *v.Combined, *v.Interval[0], *v.Interval[1], truths[n.name])
			}
		}
		if !found {
			score.Failed++
		}
	}
	return nil
}

func (f *FolderScore) add(value, u, low, high, truth float64) {
	z := (value - truth) / u
	f.Sum, f.Square = f.Sum+z, f.Square+z*z
	f.Scatter += (value - truth) * (value - truth)
	if low <= truth && truth <= high {
		f.In95++
	}
}

// writeFolders writes the page from the scores.
func writeFolders(w io.Writer, known map[string]*FolderScore) {
	fmt.Fprintf(w, `# Accuracy of series over folders

Simulated folders of known truth, calibrated by `+"`beadwell batch`"+` and scored by the numbers of their series. Written by

    go run ./cmd/accuracy -folders -results cmd/accuracy/results/folders.json -write docs/accuracy-folders.md

A folder of six powers, 20 to 120 mW, 8 um above the surface, and one of eight heights, 0.70 to 8 um, with a hidden reading at the surface; each recording
has 20,000 positions at 20 kHz along one axis; its drag is constant. In each folder the truth is off by what is stated: diameter %g(%g) um, temperature %g(%g) C, height scale %g(%g), power meter %g %%.
Bias is the mean error over the combined standard uncertainty, whose own standard error is one over the root of the folders; the spread of that ratio is 1 when the
uncertainty is right. A coverage of 72 folders has a standard error of 2.6 %%. With points in place of recordings, 1000 folders each:
`+"`go test ./cmd/beadwell/internal/batch -run CoverageOverFolders -v -folders 1000`"+`.

| folder | series | number | folders | without | root mean square error | bias | spread | 95 %% intervals hold, %% |
|---|---|---|---|---|---|---|---|---|
`, folderDiameter, folderDiameterU*100, folderTemperature, folderTemperatureU*10, folderScale, folderScaleU*100, folderMeterU*100)
	for _, n := range folderNumbers {
		f := known[n.key()]
		if f == nil || f.Folders == f.Failed {
			continue
		}
		count := float64(f.Folders - f.Failed)
		mean := f.Sum / count
		fmt.Fprintf(w, "| %s | %s | %s | %d | %d | %.3g %s | %+.2f | %.2f | %.1f |\n", n.run, n.kind, n.name, f.Folders, f.Failed,
			math.Sqrt(f.Scatter/count)*shownPerSI[n.unit], n.unit, mean, math.Sqrt(f.Square/count-mean*mean), 100*float64(f.In95)/count)
	}
}
