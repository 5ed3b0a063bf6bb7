package main

import (
	"bufio"
	"errors"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// The nth file fails, whichever it is: nothing is left, and what was there is
// as it was.
func TestFailedWriteLeavesNothing(t *testing.T) {
	files := []string{"matrix.csv", "pairs.csv", "calibration.csv"}
	for fail := range files {
		dir := t.TempDir()
		out := filepath.Join(dir, "new", "results")
		err := writeAll(out, files, fail)
		if err == nil || err.Error() != "disk full" {
			t.Fatalf("failed with %v", err)
		}
		if left, _ := os.ReadDir(dir); len(left) > 0 {
			t.Errorf("failed at file %d and left %v", fail, left)
		}
	}
	out := filepath.Join(t.TempDir(), "results")
	if err := writeAll(out, files, -1); err != nil {
		t.Fatal(err)
	}
	if list, _ := os.ReadDir(out); len(list) != len(files)+1 {
		t.Errorf("%d files written, want %d", len(list), len(files)+1)
	}
}

func writeAll(out string, files []string, fail int) error {
	r := &record{Command: "matrix"}
	f, _, err := openFolder(out, false, r)
	if err != nil {
		return err
	}
	defer f.discard()
	for k, name := range files {
		err := f.write(name, func(w *bufio.Writer) error {
			w.WriteString(strings.Repeat("x", 100000))
			if k == fail {
				return errors.New("disk full")
			}
			return nil
		})
		if err != nil {
			return err
		}
	}
	return f.commit(r)
}

func TestHuman(t *testing.T) {
	for x, want := range map[float64]string{
		0: "0", 0.5: "0.5", 0.0042163: "0.004216", 1e-7: "1e-07", 2.75: "2.750", 46.1: "46.10",
		212.94: "212.9", 999.96: "1000.0", 1136.4: "1,136", 1234567: "1,234,567", 2e9: "2e+09", -1234: "-1,234",
	} {
		if got := human(x); got != want {
			t.Errorf("%v is shown as %s, want %s", x, got, want)
		}
	}
}

func TestDidYouMean(t *testing.T) {
	words := []string{"exact", "kernel", "variation"}
	for word, want := range map[string]string{"exct": " (did you mean exact?)", "kernal": " (did you mean kernel?)", "flow": ""} {
		if got := didYouMean(word, words); got != want {
			t.Errorf("%s: %q, want %q", word, got, want)
		}
	}
}
