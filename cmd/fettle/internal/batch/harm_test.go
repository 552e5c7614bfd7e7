package batch

import (
	"os"
	"path/filepath"
	"testing"
)

// TestFolded: what a file system may take for one name is one.
func TestFolded(t *testing.T) {
	alike := [][2]string{
		{"/x/a.wav", "/x/A.WAV"}, {"/x/Deep/a.wav", "/x/deep/a.wav"},
		{"/x/\u00e9.wav", "/x/e\u0301.wav"}, {"/x/\u00c9.wav", "/x/e\u0301.wav"},
		{"/x/stra\u00dfe.wav", "/x/STRASSE.wav"}, {"/x/\u03c3.wav", "/x/\u03c2.wav"},
		{"/\xe9/a.wav", "/\xe9/A.wav"}, // a folder that is no text
	}
	for _, pair := range alike {
		if folded(pair[0]) != folded(pair[1]) {
			t.Errorf("%q and %q are told apart", pair[0], pair[1])
		}
	}
	apart := [][2]string{{"/x/a.wav", "/x/b.wav"}, {"/x/e.wav", "/x/\u00e9.wav"}, {"/x/\xe9.wav", "/x/\xe8.wav"}, {"/x/\xe9.wav", "/x/\u00e9.wav"}, {"/a/b", "/ab"}}
	for _, pair := range apart {
		if folded(pair[0]) == folded(pair[1]) {
			t.Errorf("%q and %q are taken for one", pair[0], pair[1])
		}
	}
}

// TestAbsolute resolves links as far as the path exists.
func TestAbsolute(t *testing.T) {
	dir, err := filepath.EvalSymlinks(t.TempDir())
	mustDo(t, err, os.Mkdir(filepath.Join(dir, "real"), 0o777), os.Symlink("real", filepath.Join(dir, "link")), os.Symlink("nowhere", filepath.Join(dir, "dangling")))
	for path, want := range map[string]string{
		"link": "real", "link/not/yet.wav": "real/not/yet.wav", "real/../link/x": "real/x", "dangling": "dangling", "dangling/x": "dangling/x",
	} {
		if got := absolute(filepath.Join(dir, path)); got != filepath.Join(dir, want) {
			t.Errorf("%s became %s, want %s", path, got, want)
		}
	}
	folders := folderNames{}
	for _, path := range []string{"link", "link/x.wav", "link/y.wav", "real/../link/x", "dangling", "dangling/x", "absent/x", ".", "/", "/x"} {
		path = filepath.Join(dir, path)
		if got, want := folders.absolute(path), absolute(path); got != want {
			t.Errorf("%s in its folder became %s, want %s", path, got, want)
		}
	}
	t.Chdir(dir)
	if got := absolute("link/x"); got != filepath.Join(dir, "real/x") {
		t.Errorf("link/x became %s", got)
	}
}
