package main

import (
	"bufio"
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"strings"

	"github.com/gofrs/flock"

	"example.org/barrow/dual/pairwise"
)

// resultFiles are all that a results folder may hold of barrow; the record comes
// last.
var resultFiles = []string{
	"matrix.csv", "pairs.csv", "calibration.csv", "calibration.json", "vectors.npy", "vectors.json", "flows.csv", "potentials.csv", "unmatched.csv", "districts.csv", "corridors.csv",
	"tests.csv", "comparisons.csv", "where.csv", "noise.csv", "map.csv", "tree.nwk", "clusters.csv", "outliers.csv", "ranking.csv", "series.csv", "breaks.csv", recordFile,
}

// A folder takes results. They are written to a hidden folder beside it and
// moved in at the end, so that a run that fails leaves nothing.
type folder struct {
	out     string // "" where results are checked and thrown away
	typed   string // the same as the user put it
	staging string
	outputs []recordedFile
	lock    *flock.Flock      // held while the run lasts
	journal *pairwise.Journal // nil unless the run can go on after it was cut off
	kept    string            // its path
}

// openFolder prepares --out for a run. same is true where it holds the results
// of this very run already. Results of any other run are refused unless they
// are to be replaced; other files are left alone.
func openFolder(out string, replace bool, r *record) (f *folder, same bool, err error) {
	if out == "" {
		staging, err := os.MkdirTemp("", "barrow-")
		return &folder{staging: staging}, false, err
	}
	if !replace {
		if same, err := occupied(out, r); same || err != nil {
			return nil, same, err
		}
	}
	f = &folder{typed: out}
	if f.out, err = filepath.Abs(out); err != nil {
		return nil, false, err
	}
	above := nearestAbove(f.out)
	if err := f.claim(above); err != nil {
		return f, false, err
	}
	f.staging, err = hidden(above, f.out)
	return f, false, err
}

// nearestAbove is the nearest folder above out that exists.
func nearestAbove(out string) string {
	above := filepath.Dir(out)
	for {
		if _, err := os.Stat(above); err == nil || above == filepath.Dir(above) {
			return above
		}
		above = filepath.Dir(above)
	}
}

// claim sees to it that no other run writes to the same folder, and takes away
// what one that was killed left behind.
func (f *folder) claim(above string) error {
	base := filepath.Base(f.out)
	lock := flock.New(filepath.Join(above, "."+base+".lock"))
	got, err := lock.TryLock()
	if err != nil {
		return fmt.Errorf("results cannot go to %s (%w); want an --out in a folder that can be written to", f.typed, err)
	}
	if !got {
		return fmt.Errorf("%s: another run is at work on it; wait for it to end, or give another --out", f.typed)
	}
	f.lock = lock
	entries, err := os.ReadDir(above)
	if err != nil {
		return err
	}
	for _, e := range entries {
		if strings.HasPrefix(e.Name(), "."+base+".unfinished-") {
			os.RemoveAll(filepath.Join(above, e.Name()))
		}
	}
	return nil
}

// occupied looks at what the folder holds.
func occupied(out string, r *record) (same bool, err error) {
	info, err := os.Stat(out)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return false, nil
	case err != nil:
		return false, err
	case !info.IsDir():
		return false, usageError{fmt.Sprintf("--out %s is a file; want a folder, which is made if need be", out)}
	}
	for _, name := range resultFiles {
		if _, err := os.Stat(filepath.Join(out, name)); err != nil {
			continue
		}
		held, err := readRecord(filepath.Join(out, recordFile))
		switch {
		case err != nil:
			return false, usageError{fmt.Sprintf("--out %s holds a %s without a readable %s; want another folder, or --replace to write over it", out, name, recordFile)}
		case !held.same(r):
			return false, usageError{fmt.Sprintf("--out %s holds results of %s; want another folder, or --replace to write over them", out, held.differs(r))}
		case !held.intact(out):
			return false, usageError{fmt.Sprintf("--out %s holds results of this run that were changed or are not all there; want another folder, or --replace to write over them", out)}
		}
		return true, nil
	}
	return false, nil
}

// differs says what a held record has that this run has not.
func (r *record) differs(now *record) string {
	switch {
	case r.Command != now.Command:
		return "barrow " + r.Command
	case !r.sameInputs(now):
		return "other inputs"
	case r.Version != now.Version:
		return "barrow " + r.Version
	case strings.Join(r.Arguments, "\x00") != strings.Join(now.Arguments, "\x00"):
		return strings.Join(r.Arguments, " and ")
	}
	return "other parameters"
}

// intact reports whether the results recorded are in the folder as recorded.
func (r *record) intact(out string) bool {
	for _, o := range r.Outputs {
		text, err := os.Open(filepath.Join(out, o.Path))
		if err != nil {
			return false
		}
		sum := sha256.New()
		_, err = io.Copy(sum, text)
		text.Close()
		if err != nil || hex.EncodeToString(sum.Sum(nil)) != o.SHA256 {
			return false
		}
	}
	return true
}

// hidden makes a folder of its own in the one above out.
func hidden(above, out string) (string, error) {
	for k := 0; ; k++ {
		name := filepath.Join(above, fmt.Sprintf(".%s.unfinished-%d-%d", filepath.Base(out), os.Getpid(), k))
		if err := os.Mkdir(name, 0o777); !errors.Is(err, fs.ErrExist) {
			return name, err
		}
	}
}

// write adds a file to the results.
func (f *folder) write(name string, content func(w *bufio.Writer) error) error {
	file, err := os.Create(filepath.Join(f.staging, name))
	if err != nil {
		return err
	}
	sum := sha256.New()
	w := bufio.NewWriterSize(io.MultiWriter(file, sum), 1<<16)
	err = content(w)
	if err == nil {
		err = w.Flush()
	}
	if err == nil {
		err = file.Sync()
	}
	if closed := file.Close(); err == nil {
		err = closed
	}
	if err != nil {
		return err
	}
	info, err := os.Stat(file.Name())
	if err != nil {
		return err
	}
	f.outputs = append(f.outputs, recordedFile{name, hex.EncodeToString(sum.Sum(nil)), info.Size()})
	return nil
}

// commit adds the record and moves the results to where they belong.
func (f *folder) commit(r *record) error {
	r.Outputs = f.outputs
	text, err := r.encode()
	if err != nil {
		return err
	}
	outputs := f.outputs
	if err := f.write(recordFile, func(w *bufio.Writer) error { _, err := w.Write(text); return err }); err != nil {
		return err
	}
	f.outputs = outputs
	if f.out == "" {
		return nil
	}
	if err := os.MkdirAll(filepath.Dir(f.out), 0o777); err != nil {
		return err
	}
	if _, err := os.Stat(f.out); errors.Is(err, fs.ErrNotExist) {
		err = os.Rename(f.staging, f.out)
	} else {
		err = f.moveIn()
	}
	if err == nil && f.journal != nil {
		err = os.Remove(f.kept)
	}
	return err
}

// moveIn replaces results in a folder that is there. The old record goes first
// and the new one comes last: whatever happens between, the folder does not
// claim to be whole.
func (f *folder) moveIn() error {
	fresh := map[string]bool{recordFile: true}
	for _, o := range f.outputs {
		fresh[o.Path] = true
	}
	for k := len(resultFiles) - 1; k >= 0; k-- {
		name := resultFiles[k]
		if name != recordFile && fresh[name] {
			continue // replaced in one step below
		}
		if err := os.Remove(filepath.Join(f.out, name)); err != nil && !errors.Is(err, fs.ErrNotExist) {
			return err
		}
	}
	for _, name := range resultFiles {
		if fresh[name] {
			if err := os.Rename(filepath.Join(f.staging, name), filepath.Join(f.out, name)); err != nil {
				return err
			}
		}
	}
	return os.Remove(f.staging)
}

// discard takes away what was not moved in; after commit there is nothing left.
func (f *folder) discard() {
	if f == nil {
		return
	}
	if f.staging != "" {
		os.RemoveAll(f.staging)
	}
	worth := f.journal.Worth()
	f.journal.Close()
	if f.journal != nil && !worth {
		os.Remove(f.kept)
	}
	if f.lock != nil {
		os.Remove(f.lock.Path())
		f.lock.Unlock()
	}
}

// names lists the results for the summary.
func (f *folder) names() string {
	var list []string
	for _, o := range f.outputs {
		list = append(list, o.Path)
	}
	return strings.Join(append(list, recordFile), ", ")
}
