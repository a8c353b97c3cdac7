package cli

import (
	"context"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"strings"

	"beadwell/calib"
	"beadwell/calib/quantity"
	"beadwell/calib/session"
	"beadwell/calib/track"
	"beadwell/cmd/beadwell/internal/report"
)

// printError prints an error once, as text or as one JSON object, and returns
// its exit status.
func printError(w io.Writer, err error, asJSON bool) int {
	var q quiet
	if errors.As(err, &q) {
		return q.status
	}
	p := problemOf(err)
	if asJSON {
		var f *failure
		if errors.As(err, &f) {
			p.Others = append(p.Others, f.told...)
		}
		report.ProblemJSON(w, p) // there is nowhere left to tell that this failed
		return p.Status
	}
	fmt.Fprint(w, report.PlainLines(problemText(p)))
	return p.Status
}

// problemText is each problem on its line, and its hint on a line of its own. A
// hint that the next problem repeats is left to the last of them; the summary
// of several recordings comes behind them.
func problemText(p report.Problem) string {
	all := append([]report.Problem{p}, p.Others...)
	if p.Code == codePartial {
		all = append(p.Others[:len(p.Others):len(p.Others)], p)
	}
	var b strings.Builder
	for i, one := range all {
		b.WriteString("beadwell: ")
		if one.File != "" {
			b.WriteString(place(one) + ": ")
		}
		b.WriteString(one.Message)
		if repeated := i+1 < len(all) && all[i+1].Remedy == one.Remedy; one.Remedy != "" && !repeated {
			b.WriteString(hintMark + one.Remedy)
		}
		b.WriteString("\n")
	}
	return b.String()
}

func place(p report.Problem) string {
	file := report.Plain(p.File)
	switch {
	case p.Line > 0 && p.Column > 0:
		return fmt.Sprintf("%s:%d:%d", file, p.Line, p.Column)
	case p.Line > 0:
		return fmt.Sprintf("%s:%d", file, p.Line)
	}
	return file
}

// hintMark stands between the message and the hint of an error text.
const hintMark = "\n  hint: "

// problemOf describes any error that a command returns: the first problem,
// with the others in it.
func problemOf(err error) report.Problem {
	if errors.Is(err, context.Canceled) {
		err = errInterrupted
	}
	var several partialError
	if errors.As(err, &several) {
		return report.Problem{Code: codePartial, Status: StatusPartial, Message: several.Error(), Others: problems(errors.Join(several.failed...))}
	}
	all := problems(err)
	first := all[0]
	first.Others = all[1:]
	return first
}

// problems takes an error apart into the places it names.
func problems(err error) []report.Problem {
	switch e := err.(type) {
	case *failure:
		return classified(e)
	case *track.Errors:
		all := problems(errors.Join(e.Unwrap()...))
		if e.More > 0 {
			all = append(all, report.Problem{Code: codeInput, Status: StatusInput, Message: fmt.Sprintf("and %d more", e.More)})
		}
		return all
	case interface{ Unwrap() []error }:
		var all []report.Problem
		for _, one := range e.Unwrap() {
			all = append(all, problems(one)...)
		}
		return all
	}
	return []report.Problem{problem(err)}
}

// classified gives the class of the failure to every problem in it.
func classified(f *failure) []report.Problem {
	all := problems(f.err)
	for i := range all {
		all[i].Code, all[i].Status = f.code, f.status
		if f.remedy != "" {
			all[i].Remedy = f.remedy
		}
	}
	return all
}

// problem describes an error that is not made of others.
func problem(err error) report.Problem {
	var (
		unreadable *track.Error
		setting    *session.Error
		text       *quantity.Error
		stored     *report.ReadError
		missing    *calib.SettingError
		unfit      *calib.DataError
		file       *report.FileError
		path       *fs.PathError
	)
	switch {
	case errors.As(err, &unreadable):
		return trackProblem(unreadable)
	case errors.As(err, &setting):
		return settingProblem(setting)
	case errors.As(err, &missing):
		key := strings.TrimSuffix(missing.Key+"."+missing.Axis, ".")
		return settingProblem(&session.Error{Where: missing.Where, Key: key, Problem: missing.Problem, Hint: missing.Remedy})
	case errors.As(err, &unfit):
		return unfitProblem(unfit)
	case errors.As(err, &text):
		return withHint(report.Problem{Code: codeSettings, Status: StatusUsage}, text.Error())
	case errors.As(err, &stored):
		return report.Problem{Code: codeInput, Status: StatusInput, File: stored.File, Line: stored.Line, Column: stored.Column, Message: stored.What, Remedy: stored.Remedy}
	case errors.As(err, &file):
		return withHint(report.Problem{Code: codeInput, Status: StatusInput, File: file.File}, file.Err.Error())
	case errors.As(err, &path):
		return report.Problem{Code: codeInput, Status: StatusInput, File: path.Path, Message: path.Err.Error(), Remedy: "check the name, and that you may read it"}
	}
	return withHint(report.Problem{Code: codeInternal, Status: StatusFailed}, err.Error())
}

func trackProblem(e *track.Error) report.Problem {
	p := report.Problem{Code: codeInput, Status: StatusInput, File: e.File, Line: e.Line, Column: e.Column, Message: e.What, Remedy: e.Remedy}
	if e.Code == track.CodeSetting {
		p.Code, p.Status = codeSettings, StatusUsage
	}
	return p
}

func unfitProblem(e *calib.DataError) report.Problem {
	p := report.Problem{Code: codeInput, Status: StatusInput, File: e.Name, Message: e.Problem, Remedy: e.Remedy}
	if e.Axis != "" {
		p.Message = "axis " + e.Axis + ": " + e.Problem
	}
	return p
}

func settingProblem(e *session.Error) report.Problem {
	p := withHint(report.Problem{Code: codeSettings, Status: StatusUsage}, e.Error())
	if e.Where == "" || strings.HasPrefix(e.Where, "--") {
		return p
	}
	p.File, p.Line, p.Column = e.Position()
	without := *e
	without.Where = ""
	return withHint(p, without.Error())
}

// withHint sets message and remedy from the text of an error that carries both.
func withHint(p report.Problem, text string) report.Problem {
	p.Message, p.Remedy, _ = strings.Cut(text, hintMark)
	return p
}
