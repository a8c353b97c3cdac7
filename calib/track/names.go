package track

import (
	"slices"
	"strings"
	"unicode"
)

// role is what a column is for.
type role uint8

const (
	otherRole role = iota
	timeRole
	dateRole
	frameRole // counts the frames: tells gaps, not seconds
	indexRole // counts the rows
	axisRole
	beadRole
)

// columnInfo is what the header says about a column.
type columnInfo struct {
	header  string // the name as written, without its unit
	unit    unit
	stated  bool   // the header states a unit
	unknown string // a text in parentheses that is no known unit
	other   string // another unit in a row of units, which contradicts that of the name
	role    role
	axis    byte   // 'x', 'y' or 'z'
	bead    string // identifier of the bead, or of the variant, that the name holds
	named   bool   // bead surely names a bead: beside a word such as "bead", or in a row of its own
	numeric bool
	empty   bool // no cell of the sample holds anything
	clock   bool
	whole   bool // every number of the sample is whole
	marked  bool // more than nine numbers in ten of the sample have a decimal mark
}

func words(s string) map[string]bool {
	set := map[string]bool{}
	for _, w := range strings.Fields(s) {
		set[w] = true
	}
	return set
}

// The vocabulary of headers, in lower case. Names are split into words first.
var (
	timeWords  = words("t time times timestamp timestamps zeit zeitpunkt temps tiempo tempo tijd czas tid aika время 时间 時間 시간 zaman clock uhrzeit heure hora ώρα χρόνος")
	timeExtras = words("stamp elapsed absolute relative rel abs lab since start axis of acquisition acq the exposure utc local")
	frameWords = words("frame frames image images bild bilder framenumber frameno framenr bildnummer кадр 帧 trame fotograma")
	indexWords = words("index idx n i no nr num number # sample samples nummer point row unnamed sequence seq counter numéro número")
	dateWords  = words("date datum fecha data дата 日期")
	beadWords  = words("bead beads particle particles track tracks probe trajectory teilchen partikel kugel bille particule perle partícula частица 粒子 sphere object spot beadid trackid particleid bead_id")
	beadExtras = words("id no nr num number index name label ids #")
	// A column with one of these words is no position of a bead.
	foreignWords = words("err error errors std sd sem sigma unc uncertainty var variance fwhm width intensity velocity speed vel v force power stage piezo target setpoint command drive laser mirror sum total mass size amplitude amp background bg snr quality corr correlation ref acceleration rms mean min max angle rotation phase gradient dx dy dz fit residual")
	axisExtras   = words("position positions pos posn coord coordinate coordinates displacement disp centre center centroid location loc signal deflection axis trap lage ort auslenkung koordinate posición posicion posizione позиция координата 位置 坐标 座標 position_ measured voltage volt volts qpd psd det detector diff value values ch channel of the data com gravity subpixel")
	axisJoined   = map[string]byte{"xpos": 'x', "ypos": 'y', "zpos": 'z', "posx": 'x', "posy": 'y', "posz": 'z', "xcoord": 'x', "ycoord": 'y', "zcoord": 'z',
		"xposition": 'x', "yposition": 'y', "zposition": 'z', "positionx": 'x', "positiony": 'y', "positionz": 'z', "xdata": 'x', "ydata": 'y', "zdata": 'z',
		"xc": 'x', "yc": 'y', "zc": 'z', "xcenter": 'x', "ycenter": 'y', "zcenter": 'z', "xcentre": 'x', "ycentre": 'y', "zcentre": 'z', "х": 'x', "у": 'y'}
	remarkWords = words("comment comments remark remarks note notes annotation kommentar kommentare bemerkung bemerkungen anmerkung commentaire commentaires remarque comentario comentarios commento note")
	axisAlone   = words("position displacement deflection auslenkung ort lage")
)

// splitWords cuts a name into lower-case words.
func splitWords(s string) []string {
	list := splitCased(s)
	for i, w := range list {
		list[i] = strings.ToLower(w)
	}
	return list
}

// splitCased cuts a name into words: at blanks and punctuation, between letters and
// digits, between Latin and other scripts, and before a capital that follows a small
// letter.
func splitCased(s string) []string {
	var list []string
	var b strings.Builder
	flush := func() {
		if b.Len() > 0 {
			list = append(list, b.String())
			b.Reset()
		}
	}
	var last rune
	for _, r := range s {
		switch {
		case r == '#':
			flush()
			list = append(list, "#")
			last = ' '
			continue
		case !unicode.IsLetter(r) && !unicode.IsDigit(r):
			flush()
			last = ' '
			continue
		case unicode.IsDigit(r) != unicode.IsDigit(last) && b.Len() > 0,
			unicode.IsUpper(r) && unicode.IsLower(last),
			(r > 0x2e80) != (last > 0x2e80) && b.Len() > 0:
			flush()
		}
		b.WriteRune(r)
		last = r
	}
	flush()
	return list
}

// isIdentifier tells words that number or name one bead of several.
func isIdentifier(w string) bool {
	if unicode.IsDigit([]rune(w)[0]) {
		return true
	}
	return len(w) == 1 && w[0] >= 'a' && w[0] <= 'h' || slices.Contains([]string{"left", "right", "top", "bottom", "upper", "lower"}, w)
}

// parseName splits a header cell into its name and its unit: `x (um)`,
// `x [nm]`, `x_um`, `x/um`, `x in um`, "x, um".
func parseName(cell string) columnInfo {
	s := strings.Join(strings.Fields(trimCell(cell)), " ")
	info := columnInfo{header: s}
	if s != "" && strings.IndexByte("([<", s[0]) >= 0 { // [nm] x
		if at := strings.IndexAny(s, ")]>"); at > 0 {
			if u, ok := findUnit(s[1:at]); ok && trimCell(s[at+1:]) != "" {
				info.unit, info.stated, info.header = u, true, trimCell(s[at+1:])
				return info
			}
		}
	}
	if n := len(s); n > 0 && strings.IndexByte(")]}>", s[n-1]) >= 0 {
		opening := map[byte]string{')': "(", ']': "[", '}': "{", '>': "<"}[s[n-1]]
		if at := strings.LastIndex(s, opening); at >= 0 {
			inner := trimCell(s[at+1 : n-1])
			find := findUnit
			if s == strings.ToUpper(s) && s != strings.ToLower(s[:at]) {
				find = findUpper
			}
			if u, ok := find(inner); ok {
				info.unit, info.stated, info.header = u, true, trimCell(s[:at])
				return info
			}
			if inner != "" && !slices.ContainsFunc(splitWords(inner), func(w string) bool {
				return isIdentifier(w) || beadWords[w] || axisExtras[w] || foreignWords[w] || w == "x" || w == "y" || w == "z"
			}) {
				info.unknown, info.header = inner, trimCell(s[:at])
			}
		}
		return info
	}
	for _, separator := range []string{" in ", "/", ", ", "_", " ", ".", "-", ":"} {
		at := strings.LastIndex(s, separator)
		if at <= 0 {
			continue
		}
		tail := trimCell(s[at+len(separator):])
		u, ok := findUnit(tail)
		if !ok || tail == "" || separator != "/" && separator != " in " && u.dim == plain && strings.ContainsAny(tail[:1], "1-#ifdnrN") {
			continue
		}
		if u.dim == frames || u.name == "1" || u.dim == frequency || u.isCoarse() && !isTime(s[:at]) {
			continue
		}
		info.unit, info.stated, info.header = u, true, trimCell(s[:at])
		return info
	}
	return info
}

// isTime tells whether a name without its unit is that of a time.
func isTime(name string) bool {
	c := columnInfo{header: name}
	c.understand()
	return c.role == timeRole
}

// understand sets the role of a column from its name.
func (c *columnInfo) understand() {
	list := splitWords(c.header)
	if len(list) == 0 {
		c.role = indexRole
		return
	}
	has := func(set map[string]bool) bool {
		return slices.ContainsFunc(list, func(w string) bool { return set[w] })
	}
	only := func(sets ...map[string]bool) bool {
		return !slices.ContainsFunc(list, func(w string) bool {
			return !slices.ContainsFunc(sets, func(set map[string]bool) bool { return set[w] })
		})
	}
	digits := words("0 1 2 3 4 5 6 7 8 9")
	switch {
	case has(timeWords) && only(timeWords, timeExtras, dateWords, digits):
		c.role = timeRole
	case has(dateWords) && only(dateWords, timeExtras):
		c.role = dateRole
	case has(frameWords) && only(frameWords, indexWords, beadExtras):
		c.role = frameRole
	case only(indexWords, digits) && !only(digits):
		c.role = indexRole
	case has(beadWords) && only(beadWords, beadExtras), only(words("id")):
		c.role = beadRole
	default:
		if u, ok := findUnit(c.header); ok && !c.stated && u.dim == duration && (!u.isCoarse() || len(c.header) > 3) {
			c.role, c.unit, c.stated = timeRole, u, true
			return
		}
		c.understandAxis(list, splitCased(c.header))
	}
}

// understandAxis looks for exactly one of x, y and z among the words.
// written are the words as they stand in the header.
func (c *columnInfo) understandAxis(list, written []string) {
	var rest []string
	for i, w := range list {
		axis := byte(0)
		switch {
		case w == "x" || w == "y" || w == "z":
			axis = w[0]
		case axisJoined[w] != 0:
			axis = axisJoined[w]
		case (w == "vx" || w == "vy" || w == "vz") && c.stated && c.unit.dim == voltage:
			axis = w[1]
		case foreignWords[w] && !(w == "v" && c.stated && c.unit.dim == voltage):
			c.axis = 0
			return
		}
		if axis == 0 {
			switch {
			case beadWords[w]:
				c.named = true
			case !axisExtras[w] && w != "v":
				rest = append(rest, written[i])
			}
			continue
		}
		if c.axis != 0 {
			c.axis = 0
			return
		}
		c.axis = axis
	}
	if c.axis == 0 {
		return
	}
	c.role = axisRole
	c.bead = strings.Join(rest, " ")
}

// numbered tells whether the part of the name beside the axis identifies a bead.
func (c *columnInfo) numbered() bool {
	return c.bead != "" && c.named || c.bead != "" && !slices.ContainsFunc(strings.Fields(c.bead), func(w string) bool { return !isIdentifier(strings.ToLower(w)) })
}
