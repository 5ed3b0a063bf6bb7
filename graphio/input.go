package graphio

import (
	"bufio"
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"hash"
	"io"
	"io/fs"
	"os"

	"github.com/klauspost/compress/gzip"
	"github.com/klauspost/compress/zstd"
)

// An InputFile is a file as it was read: its path as given, and the SHA-256
// (hexadecimal) and number of the bytes on disk.
type InputFile struct {
	Path   string
	SHA256 string
	Bytes  int64
}

// A Source is where data came from and what was noteworthy about it.
type Source struct {
	Files    []InputFile
	Rows     int // data rows, or matrix entries, that were used
	Warnings []string
}

func (s *Source) warn(format string, args ...any) {
	s.Warnings = append(s.Warnings, fmt.Sprintf(format, args...))
}

// maxExpanded is how far a compressed file may expand where no other limit is
// set: more than any input that would fit in memory, less than would fill a day.
const maxExpanded = 64 << 30

// An input reads one file: it sums up the bytes on disk as they pass, undoes
// gzip or zstd (seen by their first bytes, whatever the name), and stops with
// errExpands where that would yield more than the limit.
type input struct {
	io.Reader
	path   string
	file   io.ReadCloser
	sum    hash.Hash
	bytes  int64
	size   int64  // bytes on disk where known before reading and uncompressed, else -1
	left   int64  // expanded bytes still allowed
	packed string // "gzip", "zstd" or ""
	unpack func()
	ahead  *ahead
}

var errExpands = errors.New("compressed data expands past the limit")

// openInput opens a file for reading. what says which file it is, for faults.
func openInput(path, what string, limit int64) (*input, error) {
	file, err := os.Open(path)
	if err == nil {
		var info fs.FileInfo
		if info, err = file.Stat(); err == nil {
			if info.IsDir() {
				file.Close()
				return nil, oneFault(Fault{File: path, Found: "a directory", Want: "a file: " + what})
			}
			in, err := newInput(path, file, limit)
			if err != nil {
				file.Close()
				return nil, err
			}
			if info.Mode().IsRegular() && in.packed == "" {
				in.size = info.Size()
			}
			return in, nil
		}
		file.Close()
	}
	found := err.Error()
	var failed *fs.PathError
	if errors.As(err, &failed) {
		found = failed.Err.Error()
	}
	return nil, oneFault(Fault{File: path, Found: found, Want: "a file that can be read: " + what})
}

func oneFault(f Fault) error { return &Faults{Kept: []Fault{f}, Total: 1} }

// newInput reads from file, which it closes in the end unless it fails.
func newInput(path string, file io.ReadCloser, limit int64) (*input, error) {
	if limit <= 0 {
		limit = maxExpanded
	}
	in := &input{path: path, file: file, sum: sha256.New(), size: -1, left: limit, unpack: func() {}}
	plain, err := in.expand(bufio.NewReaderSize(summed{in}, 1<<16))
	if err != nil {
		return nil, in.readFault(err, 0)
	}
	in.ahead = newAhead(plain)
	in.Reader = in.ahead
	return in, nil
}

// expand undoes compression.
func (in *input) expand(raw *bufio.Reader) (io.Reader, error) {
	head, err := raw.Peek(4)
	if err != nil && err != io.EOF {
		return nil, err
	}
	switch {
	case bytes.HasPrefix(head, []byte{0x1f, 0x8b}):
		in.packed = "gzip"
		z, err := gzip.NewReader(raw)
		return limited{z, in}, err
	case bytes.HasPrefix(head, []byte{0x28, 0xb5, 0x2f, 0xfd}):
		in.packed = "zstd"
		// 128 MiB is the largest window zstd itself opens without being told to.
		z, err := zstd.NewReader(raw, zstd.WithDecoderConcurrency(1), zstd.WithDecoderLowmem(true), zstd.WithDecoderMaxWindow(128<<20))
		if err != nil {
			return nil, err
		}
		in.unpack = z.Close
		return limited{z, in}, nil
	}
	return raw, nil
}

// summed passes bytes from disk on and sums them up.
type summed struct{ *input }

func (s summed) Read(p []byte) (int, error) {
	n, err := s.file.Read(p)
	s.sum.Write(p[:n])
	s.bytes += int64(n)
	return n, err
}

// limited counts expanded bytes against the limit.
type limited struct {
	from io.Reader
	*input
}

func (l limited) Read(p []byte) (int, error) {
	n, err := l.from.Read(p)
	if l.left -= int64(n); l.left < 0 {
		return 0, errExpands
	}
	return n, err
}

// readFault says what went wrong while reading, at a line if above 0.
func (in *input) readFault(err error, line int) error {
	f := Fault{File: in.path, Line: line}
	switch {
	case errors.Is(err, errExpands):
		f.Found = fmt.Sprintf("%s data that expands past the limit of bytes for a compressed file", in.packed)
		f.Want = "a smaller file, or the same file uncompressed"
	case in.packed != "" && errors.Is(err, io.ErrUnexpectedEOF):
		f.Found = in.packed + " data that ends early"
		f.Want = "the whole file: copy or fetch it again"
	case in.packed != "":
		f.Found = fmt.Sprintf("damaged %s data (%v)", in.packed, err)
		f.Want = "an undamaged file: copy or fetch it again"
	default:
		f.Found = fmt.Sprintf("a failed read (%v)", err)
		f.Want = "a file that can be read to its end"
	}
	return oneFault(f)
}

// finish reads whatever is left, so that the sum covers the whole file, and
// describes it.
func (in *input) finish() (InputFile, error) {
	if _, err := io.Copy(io.Discard, in.Reader); err != nil {
		return InputFile{}, in.readFault(err, 0)
	}
	return InputFile{Path: in.path, SHA256: hex.EncodeToString(in.sum.Sum(nil)), Bytes: in.bytes}, nil
}

func (in *input) close() {
	in.file.Close()
	in.ahead.stop()
	in.unpack()
}

// peek is the first n bytes of the data, or all if there are fewer.
func (in *input) peek(n int) ([]byte, error) {
	if in.ahead.block.data == nil && in.ahead.block.err == nil {
		in.ahead.block = <-in.ahead.filled
	}
	b := in.ahead.block
	if len(b.data) == 0 && b.err != nil && b.err != io.EOF {
		return nil, b.err
	}
	return b.data[:min(n, len(b.data))], nil
}
