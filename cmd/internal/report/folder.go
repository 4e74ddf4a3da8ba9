package report

import (
	"bufio"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"strings"

	"cedewright/portfolio/fault"
)

// File is a file to be written.
type File struct {
	Name  string
	Write func(io.Writer) error
}

// marker is the file by which a folder of results is known.
const marker = "result.json"

// ours tells whether a file of that name is one that this program writes into a folder of results.
func ours(name string) bool {
	if name == marker || name == "frontier.csv" || name == "report.html" {
		return true
	}
	return strings.HasPrefix(name, "curve-") && (strings.HasSuffix(name, ".svg") || strings.HasSuffix(name, ".png"))
}

// CheckFolder tells, before a long run, whether WriteFolder would refuse the folder: it takes a new one, an empty one, or with replace one
// that holds nothing but earlier results.
func CheckFolder(folder string, replace bool) error {
	info, err := os.Stat(folder)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return checkParent(folder)
	case err != nil:
		return folderFault(fmt.Sprintf("%q cannot be used", folder), "", bare(err))
	case !info.IsDir():
		return folderFault(fmt.Sprintf("%q is a file", folder), "the name of a folder", nil)
	}
	entries, err := os.ReadDir(folder)
	if err != nil {
		return folderFault(fmt.Sprintf("%q cannot be read", folder), "", bare(err))
	}
	for _, e := range entries {
		if !ours(e.Name()) || e.IsDir() {
			return folderFault(fmt.Sprintf("%q holds %q, which is not a result of this program", folder, e.Name()), "a new folder, an empty one, or one with nothing but results and --replace", nil)
		}
	}
	switch {
	case len(entries) == 0:
	case !isResult(filepath.Join(folder, marker)):
		return folderFault(fmt.Sprintf("%q holds files that are not results of this program", folder), "a new folder, an empty one, or one with nothing but results and --replace", nil)
	case !replace:
		return folderFault(fmt.Sprintf("%q holds results already", folder), "another folder, or --replace", nil)
	}
	return checkParent(folder)
}

func folderFault(found, allowed string, err error) error {
	return &fault.Fault{Key: "--out", Found: found, Allowed: allowed, Err: err}
}

// bare gives the cause of an error of the file system without the path, which the message names already.
func bare(err error) error {
	if p := (*fs.PathError)(nil); errors.As(err, &p) {
		return p.Err
	}
	return err
}

// isResult tells whether a file is a document of this program.
func isResult(path string) bool {
	data, err := os.ReadFile(path)
	if err != nil {
		return false
	}
	var document struct{ Program string }
	return json.Unmarshal(data, &document) == nil && strings.HasPrefix(document.Program, "cedewright")
}

// checkParent sees to it that a folder can be made beside the one that is asked for.
func checkParent(folder string) error {
	parent := filepath.Dir(filepath.Clean(folder))
	if info, err := os.Stat(parent); err != nil || !info.IsDir() {
		return folderFault(fmt.Sprintf("the folder %q, in which %q would lie, is not there", parent, folder), "a folder that exists, for the new one to lie in", nil)
	}
	trial, err := os.MkdirTemp(parent, ".cedewright-")
	if err != nil {
		return folderFault(fmt.Sprintf("nothing can be written to %q", parent), "a folder to which you may write", bare(err))
	}
	return os.Remove(trial)
}

// WriteFolder writes files into a folder, whole or not at all: they are written into a new folder beside it, which then takes its place.
func WriteFolder(folder string, replace bool, files []File) (err error) {
	if err := CheckFolder(folder, replace); err != nil {
		return err
	}
	folder = filepath.Clean(folder)
	if real, err := filepath.EvalSymlinks(folder); err == nil {
		folder = real // a link stays a link
	}
	fresh, err := os.MkdirTemp(filepath.Dir(folder), "."+filepath.Base(folder)+"-new-")
	if err != nil {
		return fmt.Errorf("report: write results: %w", err)
	}
	defer func() {
		if err != nil {
			_ = os.RemoveAll(fresh) // nothing half-written stays
		}
	}()
	for _, f := range files {
		if err := writeFile(filepath.Join(fresh, f.Name), f.Write); err != nil {
			return fmt.Errorf("report: write %s: %w", f.Name, err)
		}
	}
	if err := os.Chmod(fresh, 0o755); err != nil {
		return fmt.Errorf("report: write results: %w", err)
	}
	return exchange(fresh, folder)
}

// exchange puts the fresh folder in the place of an old one, which is taken away only when the new one stands.
func exchange(fresh, folder string) error {
	if _, err := os.Stat(folder); errors.Is(err, fs.ErrNotExist) {
		if err := os.Rename(fresh, folder); err != nil {
			return fmt.Errorf("report: write results: %w", err)
		}
		return nil
	}
	old := fresh + "-old"
	if err := os.Rename(folder, old); err != nil {
		return fmt.Errorf("report: write results: %w", err)
	}
	if err := os.Rename(fresh, folder); err != nil {
		return errors.Join(fmt.Errorf("report: write results: %w", err), os.Rename(old, folder))
	}
	return os.RemoveAll(old)
}

func writeFile(path string, write func(io.Writer) error) error {
	f, err := os.Create(path)
	if err != nil {
		return err
	}
	b := bufio.NewWriter(f)
	return errors.Join(write(b), b.Flush(), f.Sync(), f.Close())
}
