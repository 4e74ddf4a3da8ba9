package settings_test

import (
	"flag"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"cedewright/cmd/internal/settings"
	"cedewright/portfolio/fault"
)

var update = flag.Bool("update", false, "rewrite testdata/bad/messages.txt")

// messagesOf gives what a bad file is told, one message a fault, without the folder.
func messagesOf(t *testing.T, path string) []string {
	t.Helper()
	_, err := settings.Load(path)
	var list []string
	for _, f := range fault.All(err) {
		if f.File != path {
			t.Errorf("%s: a fault in the file %q", path, f.File)
		}
		list = append(list, strings.TrimPrefix(f.Error(), filepath.ToSlash(filepath.Dir(path))+"/"))
	}
	if len(list) == 0 {
		t.Errorf("%s is taken without a word (%v)", path, err)
	}
	return list
}

// TestBadFiles loads one bad file per rule and wants every message of messages.txt, in order, and no other. A file without messages and
// messages without a file fail.
func TestBadFiles(t *testing.T) {
	const folder, index = "testdata/bad", "messages.txt"
	entries, err := os.ReadDir(folder)
	if err != nil {
		t.Fatal(err)
	}
	var text strings.Builder
	files := map[string]bool{}
	want := readMessages(t, filepath.Join(folder, index))
	for _, e := range entries {
		if e.Name() == index {
			continue
		}
		files[e.Name()] = true
		got := messagesOf(t, folder+"/"+e.Name())
		text.WriteString(e.Name() + "\n\t" + strings.Join(got, "\n\t") + "\n")
		if *update {
			continue
		}
		if len(want[e.Name()]) == 0 {
			t.Errorf("%s has no messages in %s", e.Name(), index)
		}
		if g, w := strings.Join(got, "\n"), strings.Join(want[e.Name()], "\n"); g != w {
			t.Errorf("%s: got\n%s\nwant\n%s", e.Name(), g, w)
		}
	}
	for name := range want {
		if !files[name] {
			t.Errorf("%s has messages for %s, which is not there", index, name)
		}
	}
	if *update {
		if err := os.WriteFile(filepath.Join(folder, index), []byte(text.String()), 0o644); err != nil {
			t.Fatal(err)
		}
	}
}

// readMessages reads names of files, each followed by its messages on indented lines.
func readMessages(t *testing.T, path string) map[string][]string {
	t.Helper()
	data, err := os.ReadFile(path)
	if err != nil {
		if *update {
			return nil
		}
		t.Fatal(err)
	}
	messages, name := map[string][]string{}, ""
	for _, line := range strings.Split(strings.TrimRight(string(data), "\n"), "\n") {
		if message, ok := strings.CutPrefix(line, "\t"); ok {
			messages[name] = append(messages[name], message)
		} else {
			name = line
		}
	}
	return messages
}
