package track

import (
	"bytes"
	"encoding/binary"
	"fmt"
	"math"
	"strings"
	"testing"
)

// npyFile writes an array file of the given version.
func npyFile(version byte, descr, shape string, fortran bool, data any, order binary.ByteOrder) []byte {
	order1 := map[bool]string{true: "True", false: "False"}[fortran]
	header := fmt.Sprintf("{'descr': %s, 'fortran_order': %s, 'shape': (%s), }\n", descr, order1, shape)
	var b bytes.Buffer
	b.WriteString(npyMagic)
	b.Write([]byte{version, 0})
	if version == 1 {
		_ = binary.Write(&b, binary.LittleEndian, uint16(len(header)))
	} else {
		_ = binary.Write(&b, binary.LittleEndian, uint32(len(header)))
	}
	b.WriteString(header)
	_ = binary.Write(&b, order, data)
	return b.Bytes()
}

func TestArrays(t *testing.T) {
	little, big := binary.ByteOrder(binary.LittleEndian), binary.ByteOrder(binary.BigEndian)
	for name, c := range map[string]struct {
		file       []byte
		axes       int
		first      float64 // m, from nm
		last       float64
		samples    int
		timeColumn bool
	}{
		"one axis":     {npyFile(1, "'<f8'", "4,", false, []float64{1.5, 2, -3, 4}, little), 1, 1.5e-9, 4e-9, 4, false},
		"two axes":     {npyFile(2, "'<f8'", "3, 2", false, []float64{7, 1, 2, 2, -3, 9}, little), 2, 7e-9, -3e-9, 3, false},
		"fortran":      {npyFile(3, "'<f8'", "3, 2", true, []float64{7, 1, 2, 2, -3, 9}, little), 2, 7e-9, 2e-9, 3, false},
		"big endian":   {npyFile(1, "'>f8'", "4,", false, []float64{1.5, 2, -3, 4}, big), 1, 1.5e-9, 4e-9, 4, false},
		"single":       {npyFile(1, "'<f4'", "4,", false, []float32{1.5, 2, -3, 4}, little), 1, 1.5e-9, 4e-9, 4, false},
		"short":        {npyFile(1, "'<i2'", "4,", false, []int16{-300, 2, -3, 4}, little), 1, -300e-9, 4e-9, 4, false},
		"big long":     {npyFile(1, "'>i8'", "4,", false, []int64{-300, 2, -3, 4}, big), 1, -300e-9, 4e-9, 4, false},
		"byte":         {npyFile(1, "'|u1'", "4,", false, []uint8{200, 2, 3, 4}, little), 1, 200e-9, 4e-9, 4, false},
		"word":         {npyFile(1, "'<u4'", "4,", false, []uint32{4000000000, 2, 3, 4}, little), 1, 4000000000 / 1e9, 4e-9, 4, false},
		"with time":    {npyFile(1, "'<f8'", "5, 2", false, []float64{0, 7, 0.001, 2, 0.002, 2, 0.003, 3, 0.004, 9}, little), 1, 7e-9, 9e-9, 5, true},
		"named":        {npyFile(1, "[('y', '<f8'), ('t', '<f8')]", "3,", false, []float64{7, 0, 2, 0.001, 5, 0.002}, little), 1, 7e-9, 5e-9, 3, true},
		"missing":      {npyFile(1, "'<f8'", "4,", false, []float64{1.5, math.NaN(), -3, 4}, little), 1, 1.5e-9, 4e-9, 4, false},
		"single stamp": {npyFile(1, "[('t', '<f4'), ('x', '<f4')]", "3,", false, []float32{0, 7, 0.001, 2, 0.002, 5}, little), 1, 7e-9, 5e-9, 3, true},
	} {
		list, err := Read(t.Context(), bytes.NewReader(c.file), Options{Name: "a.npy", Unit: "nm", Rate: 1000})
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		rec := list[0]
		v := rec.Axes[0].Values
		if len(rec.Axes) != c.axes || rec.Samples != c.samples || v[0] != c.first || v[len(v)-1] != c.last || (rec.RateOrigin == "time column") != c.timeColumn {
			t.Errorf("%s: %d axes, %d samples, %v to %v, rate from %s; want %+v", name, len(rec.Axes), rec.Samples, v[0], v[len(v)-1], rec.RateOrigin, c)
		}
	}
}

func TestArraysRefused(t *testing.T) {
	good := npyFile(1, "'<f8'", "4,", false, []float64{1.5, 2, -3, 4}, binary.LittleEndian)
	for name, c := range map[string]struct {
		file []byte
		code string
	}{
		"cut":         {good[:len(good)-3], CodeCut},
		"cut header":  {good[:30], CodeCut},
		"version":     {append([]byte(npyMagic+"\x09"), good[7:]...), CodeFormat},
		"objects":     {npyFile(1, "'|O'", "4,", false, []float64{1, 2, 3, 4}, binary.LittleEndian), CodeFormat},
		"complex":     {npyFile(1, "'<c16'", "2,", false, []float64{1, 2, 3, 4}, binary.LittleEndian), CodeFormat},
		"three axes":  {npyFile(1, "'<f8'", "1, 2, 2", false, []float64{1, 2, 3, 4}, binary.LittleEndian), CodeFormat},
		"infinite":    {npyFile(1, "'<f8'", "4,", false, []float64{1.5, math.Inf(1), -3, 4}, binary.LittleEndian), CodeFormat},
		"on its side": {npyFile(1, "'<f8'", "2, 100", false, make([]float64, 200), binary.LittleEndian), CodeLayout},
		"one row":     {npyFile(1, "'<f8'", "1,", false, []float64{1.5}, binary.LittleEndian), CodeEmpty},
		"false shape": {npyFile(1, "'<f8'", "1000000000000,", false, []float64{1.5}, binary.LittleEndian), CodeCut},
		"bad shape":   {npyFile(1, "'<f8'", "99999999999999999999,", false, []float64{1.5}, binary.LittleEndian), CodeFormat},
		"false size":  {npyFile(1, "'<f8'", "1000000000000, 1000000000000", false, []float64{1.5}, binary.LittleEndian), CodeLimit},
		"zero width":  {npyFile(1, "'<f8'", "5, 0", false, []float64{}, binary.LittleEndian), ""},
	} {
		_, err := Read(t.Context(), bytes.NewReader(c.file), Options{Name: "a.npy", Unit: "nm", Rate: 1000})
		if err == nil || c.code != "" && code(err) != c.code {
			t.Errorf("%s: %v, want code %q", name, err, c.code)
		}
	}
}

// A number that cannot be is named by its place in the array.
func TestPlaceInArray(t *testing.T) {
	numbers := []float64{0, 1, 2, 3, 4, 5, 6, 7, 8, 1e300, 10, 11}
	for want, file := range map[string][]byte{
		"element [9] is 1e+300":      npyFile(1, "'<f8'", "12,", false, numbers, binary.LittleEndian),
		"element [4, 1] is 1e+300":   npyFile(1, "'<f8'", "6, 2", false, numbers, binary.LittleEndian),
		"element [3, 1] is 1e+300":   npyFile(1, "'<f8'", "6, 2", true, numbers, binary.LittleEndian),
		`element [4]["y"] is 1e+300`: npyFile(1, "[('x', '<f8'), ('y', '<f8')]", "6,", false, numbers, binary.LittleEndian),
	} {
		if _, err := Read(t.Context(), bytes.NewReader(file), Options{Unit: "nm", Rate: 1000}); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("%v, want %q", err, want)
		}
	}
}

func TestClock(t *testing.T) {
	for text, want := range map[string]float64{
		"12:30:00.125": 45000.125, "12:30:00,125": 45000.125, "00:00:01": 1, "12:30:00:125": 45000.125, "02:05.5": 125.5,
		"12:00:00 AM": 0, "12:00:01 PM": 43201, "1:00:00 pm": 46800, "11:59:59 AM": 43199,
		"2024-03-01T00:00:01Z": 86401, "29.02.2024 00:00:01": 1, "02/29/2024 00:00:01": 1, "2024-03-01 01:00:00+02:00": 90000, "2024-03-01": 86400,
	} {
		base := clockBase{day: daysOf(2024, 2, 29)}
		if have, err := base.seconds(text); err != nil || have != want {
			t.Errorf("seconds(%q) = %v, %v, want %v s after 2024-02-29", text, have, err, want)
		}
	}
	for _, text := range []string{"", "12:30", "12:61:00", "12:00:61", "13:00:00 PM", "0:30:00 AM", "2024-13-01", "2024-02-32", "31.05.24", "12:00:0x", "1:2:3:4", "-1:00:00", "12:00:1e1", "2024-02-29Tnoon"} {
		if s, ok := parseClock(text); ok {
			t.Errorf("parseClock(%q) = %+v, want none", text, s)
		}
	}
}

func TestGeneralNumbers(t *testing.T) {
	for _, c := range []struct {
		text            string
		mark, thousands byte
		want            float64
	}{
		{" 1.5 ", '.', 0, 1.5}, {"+1.5", '.', 0, 1.5}, {"−1,5", ',', 0, -1.5}, {"1.5D-3", '.', 0, 1.5e-3}, {"1.5d+02", '.', 0, 150}, {"1e5", '.', 0, 1e5},
		{"1,234.5", '.', ',', 1234.5}, {"1.234,5", ',', '.', 1234.5}, {"1 234,5", ',', 0, 1234.5}, {"1\u202f234\u202f567", '.', 0, 1234567}, {"1'234.5", '.', 0, 1234.5},
		{"1,234,567", '.', 0, 1234567}, {"1,234", '.', ',', 1234}, {".5", '.', 0, 0.5}, {"5.", '.', 0, 5}, {"1e-400", '.', 0, 0},
		{"NaN", '.', 0, math.NaN()}, {"N/A", '.', 0, math.NaN()}, {"", '.', 0, math.NaN()}, {"-", '.', 0, math.NaN()},
	} {
		have, err := generalNumber(c.text, c.mark, c.thousands, 0)
		if err != nil || have != c.want && (have == have || c.want == c.want) {
			t.Errorf("generalNumber(%q, %q) = %v, %v, want %v", c.text, c.mark, have, err, c.want)
		}
	}
	for text, want := range map[string]error{
		"1,234": twoMarks, "12,34.5": notNumber, "1,2345.6": notNumber, "1234,567.8": notNumber, "inf": infinite, "-Infinity": infinite, "0x10": hexForm, "1_0": scoreForm, "5%": percentage,
		"1e999": tooLarge, "1e": notNumber, "e5": notNumber, "1.2.3": notNumber, "--1": notNumber, "1 2": notNumber, "+": notNumber, "l0": notNumber, strings.Repeat("1", 500): notNumber,
	} {
		if have, err := generalNumber(text, '.', 0, 0); err != want {
			t.Errorf("generalNumber(%q) = %v, %v, want %v", text, have, err, want)
		}
	}
}
