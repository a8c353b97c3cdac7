package cli

import (
	"errors"
	"fmt"
	"io/fs"
	"os"

	"beadwell/cmd/beadwell/internal/report"
)

// The exit statuses, the same for every command; there is no other.
const (
	StatusDone        = 0   // done, and consistent
	StatusFailed      = 1   // something failed inside, or could not be written
	StatusUsage       = 2   // the command line or the settings are wrong
	StatusDistrust    = 3   // calibrated, but the cross-check or a health check says not to trust it
	StatusInput       = 4   // the input data are bad
	StatusPartial     = 5   // several recordings, and some failed
	StatusInterrupted = 130 // stopped by Ctrl-C or SIGTERM
)

// failure is an error that knows its exit status and the next step.
type failure struct {
	status int
	code   string // class of the error, for --format json
	err    error
	remedy string
	told   []report.Problem // further problems, which standard output holds as text already: for --format json alone
}

func (f *failure) Error() string { return f.err.Error() }
func (f *failure) Unwrap() error { return f.err }

// The classes of an error, as --format json names them.
const (
	codeInternal    = "internal"
	codeOutput      = "output"
	codeUsage       = "usage"
	codeSettings    = "settings"
	codeDistrust    = "distrust"
	codeInput       = "input"
	codePartial     = "partial"
	codeInterrupted = "interrupted"
)

var errInterrupted = &failure{status: StatusInterrupted, code: codeInterrupted, err: errors.New("stopped before the end; files written so far are whole")}

func usageError(remedy, format string, args ...any) error {
	return &failure{status: StatusUsage, code: codeUsage, err: fmt.Errorf(format, args...), remedy: remedy}
}

func inputError(remedy string, err error) error {
	return &failure{status: StatusInput, code: codeInput, err: err, remedy: remedy}
}

// fileError is an inputError about a file or folder.
func fileError(file, remedy string, err error) error {
	return inputError(remedy, &report.FileError{File: file, Err: bareError(err)})
}

func outputError(name string, err error) error {
	return &failure{status: StatusFailed, code: codeOutput, err: &report.FileError{File: name, Err: fmt.Errorf("cannot be written: %w", bareError(err))},
		remedy: "make room or choose another place, then run the same command again"}
}

// bareError is an error of the operating system without operation and path, which
// the message names already.
func bareError(err error) error {
	var path *fs.PathError
	if errors.As(err, &path) {
		return path.Err
	}
	var link *os.LinkError
	if errors.As(err, &link) {
		return link.Err
	}
	return err
}

// partial says how many of the recordings failed, and why each did.
func partial(failed []error, all int) error {
	return &failure{status: StatusPartial, code: codePartial, err: partialError{failed, all}}
}

type partialError struct {
	failed []error
	all    int
}

func (p partialError) Error() string {
	return fmt.Sprintf("%d of %d recordings failed", len(p.failed), p.all)
}

func (p partialError) Unwrap() []error { return p.failed }

func internalError(value any) error {
	return &failure{status: StatusFailed, code: codeInternal, err: fmt.Errorf("a mistake in the program: %v", value),
		remedy: "please report it with the command line; nothing was changed by it"}
}

// quiet is an error whose message was printed already, or needs none: the
// verdict on a recording, say.
type quiet struct{ status int }

func (q quiet) Error() string { return fmt.Sprintf("exit status %d", q.status) }

// wantsJSON tells whether errors are to be written as JSON. It looks at the
// arguments themselves, for the error may be that they cannot be read.
func wantsJSON(args []string) bool {
	for i, arg := range args {
		switch {
		case arg == "--":
			return false
		case arg == "--format=json":
			return true
		case arg == "--format" && i+1 < len(args) && args[i+1] == "json":
			return true
		}
	}
	return false
}
