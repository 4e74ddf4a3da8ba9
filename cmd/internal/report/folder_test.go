package report

import (
	"errors"
	"io"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"cedewright/portfolio/fault"
)

func document(text string) File {
	return File{Name: marker, Write: func(w io.Writer) error {
		_, err := io.WriteString(w, `{"program":"cedewright","text":"`+text+`"}`)
		return err
	}}
}

func read(t *testing.T, path string) string {
	t.Helper()
	data, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	return string(data)
}

func TestWriteFolder(t *testing.T) {
	parent := t.TempDir()
	folder := filepath.Join(parent, "run")
	if err := WriteFolder(folder, false, []File{document("first")}); err != nil {
		t.Fatal(err)
	}
	if err := WriteFolder(folder, false, []File{document("second")}); err == nil {
		t.Error("results were overwritten without being asked")
	}
	failing := []File{document("third"), {Name: "x", Write: func(io.Writer) error { return errors.New("disk full") }}}
	if err := WriteFolder(folder, true, failing); err == nil || !strings.Contains(err.Error(), "disk full") {
		t.Errorf("a failure while writing: %v", err)
	}
	if text := read(t, filepath.Join(folder, marker)); !strings.Contains(text, "first") {
		t.Errorf("the old results are gone: %s", text)
	}
	if err := WriteFolder(folder, true, []File{document("fourth"), {Name: "frontier.csv", Write: func(io.Writer) error { return nil }}}); err != nil {
		t.Errorf("--replace: %v", err)
	}
	if err := WriteFolder(folder, true, []File{document("fifth")}); err != nil {
		t.Errorf("--replace again: %v", err)
	}
	if _, err := os.Stat(filepath.Join(folder, "frontier.csv")); err == nil {
		t.Error("a file of the earlier results is left among the new ones")
	}
	if entries, err := os.ReadDir(parent); err != nil || len(entries) != 1 {
		t.Errorf("half-written files stay behind: %v", entries)
	}
	empty := filepath.Join(parent, "empty")
	if err := os.Mkdir(empty, 0o700); err != nil {
		t.Fatal(err)
	}
	if err := WriteFolder(empty, false, []File{document("into an empty folder")}); err != nil {
		t.Errorf("an empty folder: %v", err)
	}
}

// TestFolderIsNotOurs: what this program did not write is never taken away, with or without --replace.
func TestFolderIsNotOurs(t *testing.T) {
	write := func(path, text string) {
		if err := os.MkdirAll(filepath.Dir(path), 0o700); err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(path, []byte(text), 0o600); err != nil {
			t.Fatal(err)
		}
	}
	parent := t.TempDir()
	write(filepath.Join(parent, "notes", marker), `{"program":"cedewright"}`)
	write(filepath.Join(parent, "notes", "notes.txt"), "mine")
	write(filepath.Join(parent, "other", marker), `{"some":"study"}`)
	write(filepath.Join(parent, "broken", marker), `not a document`)
	write(filepath.Join(parent, "folder", "report.html", "x"), "")
	write(filepath.Join(parent, "file"), "")
	for name, want := range map[string]string{
		"notes": `holds "notes.txt", which is not a result of this program`, "other": "holds files that are not results of this program",
		"broken": "holds files that are not results of this program", "folder": `holds "report.html", which is not a result`, "file": "is a file", "no/such": "is not there",
	} {
		err := WriteFolder(filepath.Join(parent, name), true, []File{document("x")})
		if err == nil || !strings.Contains(err.Error(), want) || len(fault.All(err)) != 1 {
			t.Errorf("%s: %v, want %s", name, err, want)
		}
	}
	if text := read(t, filepath.Join(parent, "notes", "notes.txt")); text != "mine" {
		t.Error("notes are gone")
	}
	if entries, err := os.ReadDir(parent); err != nil || len(entries) != 5 {
		t.Errorf("something was left: %v", entries)
	}
}

func TestFolderBehindALink(t *testing.T) {
	parent := t.TempDir()
	if err := os.Symlink(filepath.Join(parent, "real"), filepath.Join(parent, "link")); err != nil {
		t.Skip("no links here:", err)
	}
	if err := WriteFolder(filepath.Join(parent, "real"), false, []File{document("first")}); err != nil {
		t.Fatal(err)
	}
	if err := WriteFolder(filepath.Join(parent, "link"), true, []File{document("second")}); err != nil {
		t.Fatal(err)
	}
	if text := read(t, filepath.Join(parent, "real", marker)); !strings.Contains(text, "second") {
		t.Errorf("behind the link stands %s", text)
	}
	if info, err := os.Lstat(filepath.Join(parent, "link")); err != nil || info.Mode()&os.ModeSymlink == 0 {
		t.Error("the link is gone")
	}
}

func TestOurs(t *testing.T) {
	for _, f := range append(SearchFiles(marramSearched(), nil), CurvePictures(marramCurves())...) {
		if !ours(f.Name) {
			t.Errorf("%s is written but not known as a result", f.Name)
		}
	}
	if name := fileName("../../etc/ä b"); strings.ContainsAny(name, `/\. `) {
		t.Errorf("a name reaches outside: %s", name)
	}
}
