package report

import (
	"bytes"
	"crypto/sha256"
	_ "embed"
	"encoding/base64"
	"encoding/json"
	"fmt"
	"html/template"
	"io"
	"strings"

	"beadwell/calib"
	"beadwell/cmd/beadwell/internal/figure"
)

//go:embed page.html.tmpl
var pageText string

//go:embed page.css
var pageStyle string

// HTML writes the report of one result as a single page: no script, no network,
// figures as inline SVG, and the result itself as JSON in its last element. The
// answer and the verdict come first. The page can be read on a phone, in a dark
// theme, on paper, by a screen reader and without its style sheet.
//
// The same result gives the same bytes. The error is one of writing, or says
// which part of the page could not be made.
func HTML(w io.Writer, r *calib.Result) error {
	page, err := pageOf(r)
	if err != nil {
		return err
	}
	// Parsed here and not at start-up, where every command would pay for it.
	t, err := template.New("page").Parse(pageText)
	if err != nil {
		return fmt.Errorf("page of %s: %w", Plain(InputName(r.Input)), err)
	}
	var out bytes.Buffer
	if err := t.Execute(&out, page); err != nil {
		return fmt.Errorf("page of %s: %w", Plain(InputName(r.Input)), err)
	}
	_, err = w.Write(out.Bytes())
	return err
}

// policy is the content security policy of a page: nothing is loaded or run,
// and the one style sheet is the one whose hash stands here.
func policy(style string) string {
	hash := sha256.Sum256([]byte(style))
	return "default-src 'none'; style-src 'sha256-" + base64.StdEncoding.EncodeToString(hash[:]) +
		"'; img-src data:; base-uri 'none'; form-action 'none'"
}

// styleSheet is the style sheet of the page and of the figures in it.
func styleSheet() string { return pageStyle + figure.StyleSheet() + "\n" }

// embeddedJSON is the result as JSON inside a script element. The characters
// that could end the element are written as escapes, which mean the same.
func embeddedJSON(r *calib.Result) (template.JS, error) {
	var b bytes.Buffer
	if err := JSON(&b, r); err != nil {
		return "", err
	}
	var compact bytes.Buffer
	if err := json.Compact(&compact, b.Bytes()); err != nil {
		return "", fmt.Errorf("JSON of %s: %w", Plain(InputName(r.Input)), err)
	}
	return template.JS(strings.NewReplacer("<", `\u003c`, ">", `\u003e`, "&", `\u0026`).Replace(compact.String())), nil
}
