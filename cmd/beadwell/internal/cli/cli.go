// Package cli is the command line of beadwell: one file for each command, which
// turns flags into settings, calls the packages that do the work, and writes
// what they return.
//
// Main alone knows exit statuses and prints errors. Commands return errors.
package cli

import (
	"bufio"
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"os/signal"
	"syscall"
	"time"

	"beadwell/calib"
	"beadwell/calib/session"
	"beadwell/calib/track"
	"beadwell/cmd/beadwell/internal/report"
)

// World is what a run touches outside of its arguments and files. Tests give
// their own.
type World struct {
	In       io.Reader
	Out, Err io.Writer
	Getenv   func(string) string
	Now      func() time.Time
	Version  string // of the program, as results record it
	Colour   bool   // Out is a terminal that shows colours
	Watched  bool   // Err is a terminal, on which a progress bar can move

	// Calibrate calibrates one recording, as calib.Calibrate does.
	Calibrate func(context.Context, *track.Recording, *session.Settings, calib.Options) (*calib.Result, error)
}

// Process is the world of the running process.
func Process() World {
	return World{
		In: os.Stdin, Out: os.Stdout, Err: os.Stderr,
		Getenv: os.Getenv, Now: time.Now, Version: version(), Colour: showsColour(os.Stdout, os.Getenv),
		Watched: isTerminal(os.Stderr), Calibrate: calib.Calibrate,
	}
}

// Main runs the command line args (without the program's name) and returns
// the exit status: one of the Status constants. It never panics.
func Main(args []string, w World) int {
	// A closed pipe and a limit of the file size are to be errors of the write, not
	// the end of the process.
	signal.Ignore(syscall.SIGPIPE, syscall.SIGXFSZ)
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	defer stop()
	return run(ctx, args, w)
}

// grace is how long a command may take to stop after Ctrl-C. Writing one file
// takes less; people wait no longer than a second.
const grace = 700 * time.Millisecond

// run executes one command line; when ctx ends it waits no longer than grace.
func run(ctx context.Context, args []string, w World) int {
	done := make(chan error, 1)
	go func() {
		defer func() {
			if value := recover(); value != nil {
				done <- internalError(value)
			}
		}()
		done <- execute(ctx, args, w)
	}()
	var err error
	select {
	case err = <-done:
	case <-ctx.Done():
		select {
		case err = <-done:
		case <-time.After(grace):
			err = ctx.Err()
		}
	}
	if err == nil {
		return StatusDone
	}
	if ctx.Err() != nil {
		err = errInterrupted
	}
	return printError(w.Err, err, wantsJSON(args))
}

// execute runs the command with its output gathered, and reports a failed write.
func execute(ctx context.Context, args []string, w World) error {
	out := bufio.NewWriterSize(w.Out, 1<<16)
	w.Out = out
	a := &app{World: w, args: args}
	root := a.root()
	root.SetArgs(args)
	err := root.ExecuteContext(ctx)
	var known *failure
	if err != nil && !a.started && !errors.As(err, &known) {
		err = usageError("see beadwell --help", "%w", err) // the command library refused the command line
	}
	if flushed := out.Flush(); flushed != nil {
		return outputError("standard output", flushed)
	}
	return err
}

// app carries the world and the command line to the commands.
type app struct {
	World
	args    []string
	started bool // the command line was understood, and the command runs
}

// say writes one line to standard error. A line break in a name is no line break there.
func (a *app) say(format string, values ...any) {
	fmt.Fprintln(a.Err, report.Plain(fmt.Sprintf(format, values...)))
}
