package cli

import (
	"cmp"
	"context"
	"fmt"
	"math"
	"path/filepath"
	"slices"
	"strings"
	"sync"

	"beadwell/calib"
	"beadwell/calib/session"
)

// freeBeadKey is the setting that names recordings of the free bead.
const freeBeadKey = "recording.free_bead"

// isTrapped tells whether the settings are those of a trapped bead.
func isTrapped(settings *session.Settings) bool {
	role, ok := settings.Lookup("role", "")
	return !ok || role.Word == calib.RoleTrapped
}

// findFreeBeads looks in the track list for recordings of the role free of the same bead in the same liquid, unless the settings
// name some, and states them in the settings as the track list's. Of several heights it takes the nearest, as the
// surface sees it: by 1/height.
func (s *source) findFreeBeads(folder folderSettings, path, bead string, settings *session.Settings) {
	if _, stated := settings.Lookup(freeBeadKey, ""); stated || !isTrapped(settings) || s.inspect || s.alone {
		return
	}
	type candidate struct {
		file, where string
		distance    float64
	}
	var found []candidate
	for _, row := range folder.free {
		if row.Bead != "" && row.Bead != bead {
			continue
		}
		file := filepath.Join(folder.base, filepath.FromSlash(row.File))
		own, err := s.forAnother(folder, file, row.Bead).merged(folder, file, row.Bead, nil)
		if err == nil && !isTrapped(own) && s.sameBead(folder, file, row.Bead, path, bead) {
			where, _ := own.Lookup("role", "")
			found = append(found, candidate{row.File, where.Where, math.Abs(nearness(own) - nearness(settings))})
		}
	}
	if len(found) == 0 {
		return
	}
	nearest := slices.MinFunc(found, func(a, b candidate) int { return cmp.Compare(a.distance, b.distance) }).distance
	var files []string
	where := ""
	for _, c := range found {
		if c.distance <= nearest*(1+1e-9) {
			files, where = append(files, c.file), cmp.Or(where, c.where)
		}
	}
	// A name that the setting cannot hold is one that its row in the track list could not hold either, but for a semicolon.
	if slices.ContainsFunc(files, func(f string) bool { return strings.Contains(f, ";") }) {
		return
	}
	_ = settings.Set(freeBeadKey, "", strings.Join(files, "; "), session.FromTracks, where)
}

// nearness is 1/height [1/m]; 0 far from any surface.
func nearness(settings *session.Settings) float64 {
	height, ok := settings.Lookup("chamber.height", "")
	if !ok || height.Word != "" {
		return 0
	}
	return 1 / height.Value.SI
}

// forAnother reads another recording of the same experiment: with the flags, but for those that are of the recording in
// question, and for the height only where the track list and the session file say none.
func (s *source) forAnother(folder folderSettings, path, bead string) *source {
	lacking := ofOneRecording
	if stated, err := s.stated(folder, path, bead); err == nil {
		if _, has := stated.Lookup("chamber.height", ""); !has {
			lacking = slices.DeleteFunc(slices.Clone(lacking), func(key string) bool { return key == "chamber.height" })
		}
	}
	return &source{app: s.app, file: s.file, flags: &settingFlags{settings: *s.flags.settings.Lacking(lacking...)}, alone: true}
}

// stated are the settings of a recording without the flags.
func (s *source) stated(folder folderSettings, path, bead string) (*session.Settings, error) {
	return (&source{flags: &settingFlags{}}).merged(folder, path, bead, nil)
}

// sameBead tells whether two recordings are of one bead in one liquid, as far as the track list and the session file say. Flags hold
// for both, and cannot tell them apart.
func (s *source) sameBead(folder folderSettings, file, bead, otherFile, otherBead string) bool {
	a, errA := s.stated(folder, file, bead)
	b, errB := s.stated(folder, otherFile, otherBead)
	if errA != nil || errB != nil {
		return false
	}
	for _, key := range []string{"bead.diameter", "medium.fluid", "medium.viscosity"} {
		one, _ := a.Lookup(key, "")
		two, _ := b.Lookup(key, "")
		if one.Word != two.Word || one.Value.SI != two.Value.SI || one.Value.U != two.Value.U {
			return false
		}
	}
	return true
}

// freeFiles are the paths of the recordings of the free bead that the settings of a recording name. In a session file
// and a track list they are from the folder of these, in a flag from the working folder.
func (s *source) freeFiles(of string, settings *session.Settings) []string {
	named, ok := settings.Lookup(freeBeadKey, "")
	if !ok || named.Word == "none" || !isTrapped(settings) || s.inspect || s.alone {
		return nil
	}
	return s.beside(of, named, named.Files())
}

// beside turns names in a setting into paths.
func (s *source) beside(of string, named session.Setting, files []string) []string {
	base := filepath.Dir(of)
	if folder, err := s.folder(of); err == nil && named.Origin == session.FromTracks {
		base = folder.base
	}
	paths := slices.Clone(files)
	for i, file := range paths {
		if named.Origin != session.FromFlag && of != "-" && !filepath.IsAbs(file) {
			paths[i] = filepath.Join(base, filepath.FromSlash(file))
		}
	}
	return paths
}

// freeKey is one bead of one file.
type freeKey struct{ path, bead string }

// freeOnce is a measurement that is made once, by the first that asks for it.
type freeOnce struct {
	sync.Once
	drag *calib.FreeBeadDrag
	err  error
}

// freeBeads measures the drag by the recordings of the free bead, each once. The error is that of ctx.
func (s *source) freeBeads(ctx context.Context, of, bead string, settings *session.Settings) ([]*calib.FreeBeadDrag, error) {
	var all []*calib.FreeBeadDrag
	for _, path := range s.freeFiles(of, settings) {
		s.lock.Lock()
		once, ok := s.free[freeKey{path, bead}]
		if !ok {
			if s.free == nil {
				s.free = map[freeKey]*freeOnce{}
			}
			once = &freeOnce{}
			s.free[freeKey{path, bead}] = once
		}
		s.lock.Unlock()
		once.Do(func() { once.drag, once.err = s.freeBead(ctx, path, bead) })
		if once.err != nil {
			return nil, once.err
		}
		all = append(all, once.drag)
	}
	return all, nil
}

// freeBead measures the drag by one recording: of the same bead where the file holds several.
func (s *source) freeBead(ctx context.Context, path, bead string) (*calib.FreeBeadDrag, error) {
	folder, err := s.folder(path)
	if err != nil {
		return calib.UnusableFreeBead(path, err), nil
	}
	loaded, err := s.forAnother(folder, path, bead).load(ctx, path)
	if ctx.Err() != nil {
		return nil, ctx.Err()
	}
	if err != nil {
		return calib.UnusableFreeBead(path, err), nil
	}
	for _, one := range loaded {
		if one.recording.Bead != bead && len(loaded) > 1 {
			continue
		}
		role, _ := one.settings.Lookup("role", "")
		if role.Word != calib.RoleFree && role.Origin != session.FromDefault {
			return calib.UnusableFreeBead(path, fmt.Errorf("its role is %s, not free", role.Word)), nil
		}
		// named as a free bead, it is one
		if err := one.settings.Set("role", "", calib.RoleFree, session.FromFlag, freeBeadKey); err != nil {
			return nil, err
		}
		return calib.MeasureFreeDrag(ctx, one.recording, one.settings)
	}
	return calib.UnusableFreeBead(path, fmt.Errorf("it has no bead %q", bead)), nil
}
