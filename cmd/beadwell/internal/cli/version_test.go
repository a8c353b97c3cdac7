package cli

import (
	"runtime/debug"
	"testing"
)

func TestVersionNamesTheCommit(t *testing.T) {
	settings := func(pairs ...string) (all []debug.BuildSetting) {
		for i := 0; i < len(pairs); i += 2 {
			all = append(all, debug.BuildSetting{Key: pairs[i], Value: pairs[i+1]})
		}
		return all
	}
	for _, c := range []struct {
		version  string
		settings []debug.BuildSetting
		want     string
	}{
		{"v1.2.3", settings("vcs.revision", "0a1b2c", "vcs.modified", "false"), "v1.2.3 (commit 0a1b2c)"},
		{"(devel)", settings("vcs.revision", "0a1b2c", "vcs.modified", "true"), "(devel) (commit 0a1b2c, with local changes)"},
		{"v1.2.3", nil, "v1.2.3"}, // from the module proxy, which keeps no commit
		{"", nil, "(devel)"},
	} {
		if got := versionOf(&debug.BuildInfo{Main: debug.Module{Version: c.version}, Settings: c.settings}); got != c.want {
			t.Errorf("versionOf(%q, %v) = %q, want %q", c.version, c.settings, got, c.want)
		}
	}
}
