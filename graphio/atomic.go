package graphio

import (
	"bufio"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"strings"

	"github.com/klauspost/compress/gzip"
	"github.com/klauspost/compress/zstd"
)

// WriteAtomic writes a file all or not at all: write fills a temporary file in
// the same folder, which is forced to disk and renamed to path. Whatever fails,
// the temporary file is removed and an earlier file at path stays as it was. A
// name that ends in .gz or .zst compresses.
func WriteAtomic(path string, write func(io.Writer) error) (err error) {
	temporary, err := os.CreateTemp(filepath.Dir(path), "."+filepath.Base(path)+".*")
	if err != nil {
		return err
	}
	defer func() {
		if err != nil {
			temporary.Close()
			os.Remove(temporary.Name())
			err = fmt.Errorf("%s: %w", path, err)
		}
	}()
	if err = writePacked(temporary, path, write); err != nil {
		return err
	}
	if err = temporary.Chmod(0o644); err != nil {
		return err
	}
	if err = temporary.Sync(); err != nil {
		return err
	}
	if err = temporary.Close(); err != nil {
		return err
	}
	return os.Rename(temporary.Name(), path)
}

// writePacked compresses what write writes as the name of the file asks.
func writePacked(to io.Writer, name string, write func(io.Writer) error) error {
	var packer io.WriteCloser
	switch {
	case strings.HasSuffix(name, ".gz"):
		packer = gzip.NewWriter(to)
	case strings.HasSuffix(name, ".zst"):
		z, err := zstd.NewWriter(to, zstd.WithEncoderConcurrency(1)) // the same bytes on any machine
		if err != nil {
			return err
		}
		packer = z
	default:
		buffered := bufio.NewWriterSize(to, 1<<16)
		if err := write(buffered); err != nil {
			return err
		}
		return buffered.Flush()
	}
	if err := write(packer); err != nil {
		packer.Close()
		return err
	}
	return packer.Close()
}
