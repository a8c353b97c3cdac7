package report

import (
	"bytes"
	"crypto/sha256"
	_ "embed"
	"encoding/base64"
	"fmt"
	"html/template"
	"io"
	"strings"
	"sync"

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
func HTML(w io.Writer, r *calib.Result) error { return Prepare(r).HTML(w) }

// pageTemplate is parsed when it is first needed, and not at start-up, where every command would pay for it.
var pageTemplate = sync.OnceValues(func() (*template.Template, error) { return template.New("page").Parse(pageText) })

// HTML writes the report as the function HTML does.
func (p *Prepared) HTML(w io.Writer) error {
	page, err := p.page()
	if err != nil {
		return err
	}
	t, err := pageTemplate()
	if err != nil {
		return fmt.Errorf("page of %s: %w", Plain(InputName(p.Result.Input)), err)
	}
	var out bytes.Buffer
	out.Grow(512 << 10)
	if err := t.Execute(&out, page); err != nil {
		return fmt.Errorf("page of %s: %w", Plain(InputName(p.Result.Input)), err)
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

// embeddable keeps the characters that could end a script element out of JSON: as escapes they mean the same.
var embeddable = strings.NewReplacer("<", `\u003c`, ">", `\u003e`, "&", `\u0026`)
