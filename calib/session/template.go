package session

import (
	"fmt"
	"slices"
	"strings"
)

// sectionNotes say what each section of the session file is about.
var sectionNotes = map[string]string{
	"bead":      "the bead",
	"medium":    "what it is in: a fluid, or a viscosity of your own",
	"chamber":   "where the surfaces are",
	"recording": "how the tracks were recorded and written",
	"detector":  "a photodiode in front of the digitiser",
	"fit":       "how the spectrum is fitted",
	"laser":     "the trapping laser",
	"drive":     "recordings with a moving stage",
}

// Template writes a session file to fill in: every setting with its meaning and an example,
// commented out, except those that are known already (nil for none). The notes,
// such as how the tracks were read, stand in front as comments.
func Template(known *Settings, notes ...string) string {
	var b strings.Builder
	b.WriteString("# Settings of the recordings in this folder.\n")
	b.WriteString("# Remove the # in front of a line to state it. 1.02(3) um is 1.02 um with a standard\n")
	b.WriteString("# uncertainty of 0.03 um. tracks.csv beside this file may state any of it for one recording.\n")
	for _, note := range notes {
		for line := range strings.SplitSeq(note, "\n") {
			b.WriteString("# " + comment(line) + "\n")
		}
	}
	for _, section := range sections() {
		fmt.Fprintf(&b, "\n[%s]  # %s\n", section, sectionNotes[section])
		for _, key := range registry {
			if !key.TrackOnly && key.Section() == section {
				b.WriteString(templateLines(key, known))
			}
		}
	}
	return b.String()
}

// templateLines writes one setting: what is known of it, else an example.
func templateLines(key Key, known *Settings) string {
	meaning := key.Meaning
	if key.Name == "bead.diameter" {
		meaning += ": please fill it in"
	}
	axes := known.axesOf(key.Name)
	if len(axes) > 1 {
		axes = key.Axes // TOML has no room for a general value beside those of the axes
	}
	var lines string
	for _, axis := range axes {
		setting, ok := known.Lookup(key.Name, axis)
		if ok && setting.Origin != FromDefault {
			lines += fmt.Sprintf("%s = %s  # %s\n", withAxis(key.Short(), axis), tomlString(setting.Text), meaning)
		}
	}
	if lines != "" {
		return lines
	}
	return fmt.Sprintf("# %s = %s  # %s\n", key.Short(), key.tomlExample(), meaning)
}

// tomlExample writes the placeholder as a value of the session file.
func (k Key) tomlExample() string {
	switch {
	case k.Form == RangeList:
		return "[" + tomlString(k.Placeholder) + "]"
	case k.AxisOnly:
		var parts []string
		for _, part := range splitAxes(k.Placeholder) {
			parts = append(parts, part[0]+" = "+tomlString(part[1]))
		}
		return "{ " + strings.Join(parts, ", ") + " }"
	}
	return tomlString(k.Placeholder)
}

// tomlString writes a basic string of TOML.
func tomlString(text string) string {
	var b strings.Builder
	b.WriteByte('"')
	for _, r := range text {
		switch {
		case r == '"' || r == '\\':
			b.WriteRune('\\')
			b.WriteRune(r)
		case r < ' ' || r == 0x7f:
			fmt.Fprintf(&b, `\u%04X`, r)
		default:
			b.WriteRune(r)
		}
	}
	b.WriteByte('"')
	return b.String()
}

// comment makes a line safe inside a comment.
func comment(line string) string {
	return strings.Map(func(r rune) rune {
		if r < ' ' || r == 0x7f {
			return ' '
		}
		return r
	}, strings.ToValidUTF8(line, "?"))
}

// Reference writes the table of all settings in Markdown, from the registry:
// key, flag, form, default, whether per axis, meaning.
func Reference() string {
	var b strings.Builder
	b.WriteString("| key | flag | written | default | per axis | meaning |\n|---|---|---|---|---|---|\n")
	for _, key := range registry {
		fallback := key.Default
		if key.Assumed {
			fallback += " (assumed, with a warning)"
		}
		axes := "no"
		if key.PerAxis {
			axes = strings.Join(key.Axes, ", ")
		}
		fmt.Fprintf(&b, "| `%s` | `--%s` | %s | %s | %s | %s |\n", key.Name, key.Flag, strings.ReplaceAll(key.written(), "|", `\|`), fallback, axes, key.Meaning)
	}
	return b.String()
}

// written says how the text of a setting looks: an example, words, limits.
func (k Key) written() string {
	words := slices.Clone(k.Words)
	for i, word := range words {
		words[i] = "`" + word + "`"
	}
	if k.Form == Choice {
		return strings.Join(words, ", ")
	}
	text := strings.Join(append([]string{"`" + k.Placeholder + "`"}, words...), " or ")
	if k.Limits != "" {
		text += "; " + k.Limits
	}
	return text
}
