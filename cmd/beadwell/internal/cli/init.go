package cli

import (
	"context"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"slices"
	"strings"

	"github.com/spf13/cobra"

	"beadwell/calib/session"
	"beadwell/cmd/beadwell/internal/report"
)

// initOptions is what the command line of init says.
type initOptions struct {
	folder string
	force  bool
	flags  settingFlags
}

func (a *app) initCommand(run func(context.Context, *app, initOptions) error) *cobra.Command {
	var o initOptions
	cmd := &cobra.Command{
		Use:   "init FOLDER",
		Short: "Look at the tracks of a folder and write a session.toml to fill in",
		Long: `init reads every track of a folder as far as it can be read without settings,
and writes session.toml beside them: every setting with its meaning and an
example, commented out, and how each track is read. Settings that are given as
flags are filled in.`,
		Example: "  beadwell init .\n  beadwell init --diameter '1.02(3) um' tonight",
		Args:    oneArgument("one folder"),
		RunE: func(cmd *cobra.Command, args []string) error {
			o.folder = args[0]
			return run(cmd.Context(), a, o)
		},
	}
	cmd.Flags().BoolVar(&o.force, "force", false, "replace a session.toml that is there")
	addSettingFlags(cmd.Flags(), &o.flags)
	completeSettings(cmd)
	return cmd
}

func runInit(ctx context.Context, a *app, o initOptions) error {
	root, err := os.OpenRoot(o.folder)
	if err != nil {
		return fileError(o.folder, "give a folder that holds tracks", err)
	}
	defer root.Close()
	folder := outputFolder{root: root, parent: o.folder, name: "."}
	exists, err := folder.check(session.FileName)
	if err != nil {
		return err
	}
	if exists && !o.force {
		return &failure{status: StatusUsage, code: codeOutput, err: &report.FileError{File: folder.path(session.FileName), Err: errors.New("is there already")},
			remedy: "edit it, or add --force to replace it"}
	}
	notes, err := a.look(ctx, o)
	if err != nil {
		return err
	}
	if err := folder.write(ctx, session.FileName, []byte(session.Template(&o.flags.settings, notes...))); err != nil {
		return err
	}
	fmt.Fprintf(a.Out, "%s\n", report.Plain(folder.path(session.FileName)))
	return nil
}

// trackEndings are the endings of files that init looks at.
var trackEndings = []string{".csv", ".tsv", ".txt", ".dat", ".npy"}

// look says how each track of the folder is read.
func (a *app) look(ctx context.Context, o initOptions) ([]string, error) {
	entries, err := os.ReadDir(o.folder)
	if err != nil {
		return nil, fileError(o.folder, "give a folder that holds tracks", err)
	}
	src := &source{app: a, flags: &o.flags, inspect: true, folders: map[string]folderSettings{filepath.Clean(o.folder): {}}}
	notes := []string{""}
	for _, entry := range entries {
		if !isTrack(entry) {
			continue
		}
		recordings, err := src.load(ctx, filepath.Join(o.folder, entry.Name()))
		switch {
		case ctx.Err() != nil:
			return nil, ctx.Err()
		case err != nil:
			notes = append(notes, entry.Name()+": "+strings.SplitN(err.Error(), "\n", 2)[0])
		default:
			notes = append(notes, entry.Name()+": "+recordings[0].recording.ReadAs.String())
		}
	}
	if len(notes) == 1 {
		notes = append(notes, "No track was found in this folder.")
	}
	return notes, nil
}

func isTrack(entry fs.DirEntry) bool {
	name := strings.ToLower(entry.Name())
	for _, packed := range []string{".gz", ".zst"} {
		name = strings.TrimSuffix(name, packed)
	}
	return entry.Type().IsRegular() && name != session.TracksName && slices.Contains(trackEndings, filepath.Ext(name))
}
