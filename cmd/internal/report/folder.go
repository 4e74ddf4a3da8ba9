package report

import (
	"bufio"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"

	"cedewright/portfolio/fault"
)

// File is a file to be written.
type File struct {
	Name  string
	Write func(io.Writer) error
}

// marker is the file by which a folder of results is known.
const marker = "result.json"

// CheckFolder tells, before a long run, whether WriteFolder would refuse the folder.
func CheckFolder(folder string, replace bool) error {
	info, err := os.Stat(folder)
	if errors.Is(err, fs.ErrNotExist) {
		if parent := filepath.Dir(filepath.Clean(folder)); parent != "." {
			if info, err := os.Stat(parent); err != nil || !info.IsDir() {
				return &fault.Fault{Key: "--out", Found: fmt.Sprintf("the folder %q, in which %q would lie, is not there", parent, folder), Allowed: "a folder that exists, for the new one to lie in"}
			}
		}
		return nil
	}
	if err != nil {
		return &fault.Fault{Key: "--out", Found: fmt.Sprintf("%q cannot be used", folder), Err: err}
	}
	if !info.IsDir() {
		return &fault.Fault{Key: "--out", Found: fmt.Sprintf("%q is a file", folder), Allowed: "the name of a folder"}
	}
	entries, err := os.ReadDir(folder)
	if err != nil {
		return &fault.Fault{Key: "--out", Found: fmt.Sprintf("%q cannot be read", folder), Err: err}
	}
	if len(entries) == 0 {
		return nil
	}
	_, err = os.Stat(filepath.Join(folder, marker))
	switch {
	case err != nil:
		return &fault.Fault{Key: "--out", Found: fmt.Sprintf("%q holds files that are not results of this program", folder), Allowed: "a new folder, an empty one, or one with results and --replace"}
	case !replace:
		return &fault.Fault{Key: "--out", Found: fmt.Sprintf("%q holds results already", folder), Allowed: "another folder, or --replace"}
	}
	return nil
}

// WriteFolder writes files into a folder, whole or not at all: they are written into a new folder beside it, which then takes its place.
func WriteFolder(folder string, replace bool, files []File) (err error) {
	if err := CheckFolder(folder, replace); err != nil {
		return err
	}
	folder = filepath.Clean(folder)
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
