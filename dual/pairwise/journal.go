package pairwise

import (
	"bufio"
	"bytes"
	"encoding/binary"
	"errors"
	"fmt"
	"hash/crc32"
	"io"
	"math"
	"os"
)

// A Journal keeps what was solved on disk, batch by batch, so that a run that
// was cut off at any moment can go on. A nil *Journal keeps nothing.
type Journal struct {
	file  *os.File
	held  [][]outcome // batches of the run before, not yet asked for
	at    []int64     // where each of them begins in the file
	found int
	kept  int // batches on disk that this run has used or added
}

// ErrJournal: a journal is of another run, and is left as it is.
var ErrJournal = errors.New("a journal of another run")

const journalHead = "barrow journal 1\n"

// OpenJournal opens or begins the journal of a run, which key tells from
// others. A batch that was cut off while it was written is dropped. The caller
// sees to it that no other process has it open.
func OpenJournal(path, key string) (*Journal, error) {
	file, err := os.OpenFile(path, os.O_RDWR|os.O_CREATE, 0o666)
	if err != nil {
		return nil, err
	}
	j := &Journal{file: file}
	if err := j.load(journalHead + key + "\n"); err != nil {
		file.Close()
		return nil, fmt.Errorf("%s: %w", path, err)
	}
	return j, nil
}

// load reads the batches that are whole, and cuts off what is not.
func (j *Journal) load(head string) error {
	info, err := j.file.Stat()
	if err != nil {
		return err
	}
	r := bufio.NewReaderSize(j.file, 1<<16)
	if info.Size() < int64(len(head)) {
		// Cut off at its very beginning, or new.
		text, err := io.ReadAll(r)
		if err != nil {
			return err
		}
		if !bytes.HasPrefix([]byte(head), text) {
			return ErrJournal
		}
		if err := j.file.Truncate(0); err != nil {
			return err
		}
		if _, err := j.file.WriteAt([]byte(head), 0); err != nil {
			return err
		}
		_, err = j.file.Seek(int64(len(head)), io.SeekStart)
		return err
	}
	text := make([]byte, len(head))
	if _, err := io.ReadFull(r, text); err != nil {
		return err
	}
	if string(text) != head {
		return ErrJournal
	}
	offset := int64(len(head))
	for {
		batch, size, ok := readBatch(r, info.Size()-offset)
		if !ok {
			break
		}
		j.held, j.at = append(j.held, batch), append(j.at, offset)
		offset += size
	}
	j.found = len(j.held)
	return j.cut(offset)
}

func (j *Journal) cut(offset int64) error {
	if err := j.file.Truncate(offset); err != nil {
		return err
	}
	_, err := j.file.Seek(offset, io.SeekStart)
	return err
}

// Found is how many batches a run before had finished.
func (j *Journal) Found() int {
	if j == nil {
		return 0
	}
	return j.found
}

// replay is what came of a batch in the run before, nil if it had not come to
// it. A journal that took another turn is cut off there.
func (j *Journal) replay(batch []pair) []outcome {
	if j == nil || len(j.held) == 0 {
		return nil
	}
	list := j.held[0]
	same := len(list) == len(batch)
	for k := 0; same && k < len(batch); k++ {
		same = list[k].pair == batch[k]
	}
	if !same {
		if j.cut(j.at[0]) != nil {
			return nil
		}
		j.held, j.at = nil, nil
		return nil
	}
	j.held, j.at = j.held[1:], j.at[1:]
	j.kept++
	return list
}

// append writes a batch and waits until it is on disk.
func (j *Journal) append(list []outcome) error {
	if j == nil {
		return nil
	}
	var b []byte
	number := func(x float64) { b = binary.LittleEndian.AppendUint64(b, math.Float64bits(x)) }
	b = binary.LittleEndian.AppendUint32(b, uint32(len(list)))
	for _, o := range list {
		b = binary.LittleEndian.AppendUint32(b, uint32(o.i))
		b = binary.LittleEndian.AppendUint32(b, uint32(o.j))
		b = binary.LittleEndian.AppendUint32(b, uint32(len(o.height)))
		number(o.lower)
		number(o.upper)
		number(o.slack)
		for _, h := range o.height {
			number(h)
		}
	}
	frame := binary.LittleEndian.AppendUint32(nil, uint32(len(b)))
	frame = append(frame, b...)
	frame = binary.LittleEndian.AppendUint32(frame, crc32.ChecksumIEEE(b))
	if _, err := j.file.Write(frame); err != nil {
		return err
	}
	j.kept++
	return j.file.Sync()
}

// Worth reports whether the journal saves the next run anything.
func (j *Journal) Worth() bool { return j != nil && j.kept+len(j.held) > 0 }

// readBatch reads a batch of at most left bytes with its frame; ok is false
// where there is no whole one.
func readBatch(r io.Reader, left int64) (list []outcome, size int64, ok bool) {
	var word [4]byte
	if _, err := io.ReadFull(r, word[:]); err != nil {
		return nil, 0, false
	}
	length := int64(binary.LittleEndian.Uint32(word[:]))
	if length+8 > left || length < 4 {
		return nil, 0, false
	}
	b := make([]byte, length)
	if _, err := io.ReadFull(r, b); err != nil {
		return nil, 0, false
	}
	if _, err := io.ReadFull(r, word[:]); err != nil || binary.LittleEndian.Uint32(word[:]) != crc32.ChecksumIEEE(b) {
		return nil, 0, false
	}
	whole := func() uint32 { x := binary.LittleEndian.Uint32(b); b = b[4:]; return x }
	number := func() float64 { x := math.Float64frombits(binary.LittleEndian.Uint64(b)); b = b[8:]; return x }
	for count := whole(); count > 0; count-- {
		if len(b) < 36 {
			return nil, 0, false
		}
		o := outcome{pair: pair{int(whole()), int(whole())}}
		heights := int64(whole())
		o.lower, o.upper, o.slack = number(), number(), number()
		if int64(len(b)) < 8*heights {
			return nil, 0, false
		}
		for ; heights > 0; heights-- {
			o.height = append(o.height, number())
		}
		list = append(list, o)
	}
	return list, length + 8, len(b) == 0
}

// Close closes the journal, and keeps it on disk.
func (j *Journal) Close() error {
	if j == nil {
		return nil
	}
	return j.file.Close()
}
