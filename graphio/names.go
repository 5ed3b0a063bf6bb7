package graphio

import (
	"fmt"
	"hash/maphash"
	"strings"
	"unicode/utf8"
)

// A nameTable numbers names in order of first appearance. Readers look up two
// names an edge, and half of their time went into a map; this open-addressing
// table keeps eight bytes a slot, at most half of them used, and so needs one
// cache miss to find a slot and one to compare the name.
//
// Hashes differ from run to run; nothing but the place of a slot depends on
// them.
type nameTable struct {
	names []string
	seed  maphash.Seed
	slots []slot          // a power of two of them, linear probing
	chunk strings.Builder // names are cut from its string, many to one allocation
}

// A slot holds the hash of a name and its number plus one.
type slot struct{ hash, entry uint32 }

// newNameTable makes room for the expected number of names.
func newNameTable(expected int) *nameTable {
	t := &nameTable{names: make([]string, 0, expected), seed: maphash.MakeSeed()}
	size := 16
	for size < 2*expected {
		size *= 2
	}
	t.slots = make([]slot, size)
	return t
}

// tableOf numbers names that are strings already; twice is called for each that
// stands there again, and the first keeps its number.
func tableOf(names []string, twice func(v int)) *nameTable {
	t := newNameTable(len(names))
	for v, name := range names {
		hash := uint32(maphash.String(t.seed, name))
		if t.findHashed(name, hash) >= 0 {
			twice(v)
			t.names = append(t.names, name) // so that numbers stay in step
		} else {
			t.put(name, hash)
		}
	}
	return t
}

// find is the number of a name, -1 where it has none, and its hash.
func (t *nameTable) find(name []byte) (v int32, hash uint32) {
	hash = uint32(maphash.Bytes(t.seed, name))
	mask := uint32(len(t.slots) - 1)
	for i := hash & mask; ; i = (i + 1) & mask {
		s := t.slots[i]
		if s.entry == 0 {
			return -1, hash
		}
		if s.hash == hash && t.names[s.entry-1] == string(name) {
			return int32(s.entry - 1), hash
		}
	}
}

// findString is the number of a name, -1 where it has none.
func (t *nameTable) findString(name string) int32 {
	return t.findHashed(name, uint32(maphash.String(t.seed, name)))
}

func (t *nameTable) findHashed(name string, hash uint32) int32 {
	mask := uint32(len(t.slots) - 1)
	for i := hash & mask; ; i = (i + 1) & mask {
		s := t.slots[i]
		if s.entry == 0 {
			return -1
		}
		if s.hash == hash && t.names[s.entry-1] == name {
			return int32(s.entry - 1)
		}
	}
}

// add numbers a name that find did not find, and whose hash it gave.
func (t *nameTable) add(name []byte, hash uint32) int32 {
	const size = 1 << 16
	if t.chunk.Cap()-t.chunk.Len() < len(name) {
		t.chunk.Reset()
		t.chunk.Grow(max(size, len(name)))
	}
	begin := t.chunk.Len()
	t.chunk.Write(name)
	return t.put(t.chunk.String()[begin:], hash)
}

func (t *nameTable) put(name string, hash uint32) int32 {
	t.names = append(t.names, name)
	t.place(slot{hash, uint32(len(t.names))})
	if 2*len(t.names) > len(t.slots) {
		old := t.slots
		t.slots = make([]slot, 2*len(old))
		for _, s := range old {
			if s.entry != 0 {
				t.place(s)
			}
		}
	}
	return int32(len(t.names) - 1)
}

func (t *nameTable) place(s slot) {
	mask := uint32(len(t.slots) - 1)
	i := s.hash & mask
	for t.slots[i].entry != 0 {
		i = (i + 1) & mask
	}
	t.slots[i] = s
}

// intern is the name as a string, the same one for the same bytes.
func (t *nameTable) intern(name []byte) string {
	v, hash := t.find(name)
	if v < 0 {
		v = t.add(name, hash)
	}
	return t.names[v]
}

// nameFault says what is wrong with a name of a node or sample, "" if nothing.
func nameFault(name []byte, of string) (found, want string) {
	switch {
	case len(name) == 0:
		return "no " + of, "the name of a " + of
	case len(name) > maxName:
		return fmt.Sprintf("a name of %d bytes: %s", len(name), show(name)), fmt.Sprintf("a name of at most %d bytes", maxName)
	case !utf8.Valid(name):
		return fmt.Sprintf("%s %s, which is not UTF-8", of, show(name)), "a file saved as UTF-8"
	}
	return "", ""
}

// maxName is the longest name accepted, in bytes. A longer one is a column of
// text, or a quote in the wrong place.
const maxName = 1024

// A speller suggests known names for unknown ones that differ in capitals,
// spaces, leading zeros or a trailing ".0", as tables that went through a
// spreadsheet do. It costs nothing until the first question.
type speller struct {
	names func() []string
	plain map[string]string
}

// hint is " (did you mean …?)", or "".
func (s *speller) hint(name []byte) string {
	if s.plain == nil {
		s.plain = make(map[string]string)
		for _, n := range s.names() {
			if p := plainName(n); s.plain[p] == "" {
				s.plain[p] = n
			}
		}
	}
	if n := s.plain[plainName(string(name))]; n != "" {
		return fmt.Sprintf(" (did you mean %q?)", n)
	}
	return ""
}

func plainName(s string) string {
	s = lower(strings.Join(strings.Fields(s), ""))
	if trimmed, ok := strings.CutSuffix(s, ".0"); ok && trimmed != "" {
		s = trimmed
	}
	if trimmed := strings.TrimLeft(s, "0"); trimmed != "" {
		s = trimmed
	}
	return s
}
