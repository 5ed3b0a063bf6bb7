package graphio

import (
	"bytes"
	"fmt"
	"io"
	"strings"
	"unicode/utf8"
)

// maxRecord is the longest row accepted, in bytes: a row of a million columns
// fits, and a file without line ends cannot fill memory.
const maxRecord = 16 << 20

// A table reads delimited text with a header row by row (RFC 4180, with comma,
// tab or semicolon), without allocating: the fields of a row point into its
// buffer until the next row. Blank lines are skipped; spaces around an
// unquoted field are not part of it.
type table struct {
	in     *input
	what   string // "an edges file", for faults
	faults *FaultList
	delim  byte
	header []string

	buf      []byte
	pos, end int // unread bytes are buf[pos:end]
	eof      bool
	failed   error // a read error: no more rows

	line   int // first line of the current row, 1-based
	next   int // line that the next row begins on
	fields [][]byte
}

// openTable opens a file and reads its header. Faults of the rows are added to
// faults; the error is for files that cannot be read as a table at all.
func openTable(path, what string, limit int64, faults *FaultList) (*table, error) {
	in, err := openInput(path, what, limit)
	if err != nil {
		return nil, err
	}
	t, err := newTable(in, what, faults)
	if err != nil {
		in.close()
	}
	return t, err
}

func newTable(in *input, what string, faults *FaultList) (*table, error) {
	t := &table{in: in, what: what, faults: faults, next: 1, buf: make([]byte, 1<<18)}
	t.fill()
	if bytes.HasPrefix(t.buf[:t.end], []byte("\xef\xbb\xbf")) { // byte order mark
		t.pos = 3
	}
	if alien := alienFormat(t.buf[t.pos:t.end]); alien != "" {
		return nil, oneFault(Fault{File: in.path, Found: alien, Want: what + " as UTF-8 text, comma, tab or semicolon separated"})
	}
	if err := t.readHeader(); err != nil {
		return nil, err
	}
	return t, nil
}

// alienFormat names a format that is not delimited text by its first bytes.
func alienFormat(head []byte) string {
	for _, f := range []struct{ magic, name string }{
		{"PK\x03\x04", "a zip archive (a spreadsheet?)"},
		{"\xd0\xcf\x11\xe0", "an old spreadsheet or office document"},
		{"\xff\xfe", "UTF-16 text"},
		{"\xfe\xff", "UTF-16 text"},
		{"\x93NUMPY", "a NumPy array"},
		{"%%MatrixMarket", "a Matrix Market file"},
		{"PAR1", "a Parquet file"},
		{"%PDF", "a PDF document"},
		{"BZh", "bzip2 data"},
		{"\xfd7zXZ", "xz data"},
		{"\x1f\x8b", "gzip data inside compressed data"},
		{"\x28\xb5\x2f\xfd", "zstd data inside compressed data"},
		{"<", "a page or document with tags (HTML or XML)"},
		{"{", "JSON"},
	} {
		if bytes.HasPrefix(head, []byte(f.magic)) {
			return f.name
		}
	}
	if bytes.IndexByte(head[:min(len(head), 512)], 0) >= 0 {
		return "binary data"
	}
	return ""
}

func (t *table) readHeader() error {
	line := t.firstLine()
	t.delim = delimiter(line, t.in.path)
	if !t.row() {
		if err := t.err(); err != nil {
			return err
		}
		return oneFault(Fault{File: t.in.path, Found: "no header, no rows", Want: t.what})
	}
	t.header = make([]string, len(t.fields))
	for i, f := range t.fields {
		if !utf8.Valid(f) {
			return oneFault(t.fault(i, fmt.Sprintf("header %s, which is not UTF-8", show(f)), "UTF-8 text"))
		}
		if bytes.IndexByte(f, '\r') >= 0 {
			return oneFault(t.fault(0, "lines that end in carriage returns alone", `lines that end in \n or \r\n`))
		}
		t.header[i] = string(f)
	}
	return nil
}

// firstLine is the first line that is not blank, as far as it is in the buffer.
func (t *table) firstLine() []byte {
	rest := t.buf[t.pos:t.end]
	for len(rest) > 0 {
		line, after, found := bytes.Cut(rest, []byte("\n"))
		if len(bytes.TrimSpace(line)) > 0 || !found {
			return line
		}
		rest = after
	}
	return nil
}

// delimiter is whichever of comma, tab and semicolon the header has most of,
// outside quotes; the name decides for .tsv. Ties go to the comma.
func delimiter(header []byte, path string) byte {
	var count [256]int
	quoted := false
	for _, c := range header {
		if c == '"' {
			quoted = !quoted
		}
		if !quoted {
			count[c]++
		}
	}
	base := strings.TrimSuffix(strings.TrimSuffix(lower(path), ".gz"), ".zst")
	if count['\t'] > 0 && (strings.HasSuffix(base, ".tsv") || strings.HasSuffix(base, ".tab")) {
		return '\t'
	}
	best := byte(',')
	for _, d := range []byte{'\t', ';'} {
		if count[d] > count[best] {
			best = d
		}
	}
	return best
}

// fill reads more into the buffer, growing it when it is full. It reports
// whether there is more.
func (t *table) fill() bool {
	if t.eof {
		return false
	}
	if t.pos > 0 {
		copy(t.buf, t.buf[t.pos:t.end])
		t.end -= t.pos
		t.pos = 0
	}
	if t.end == len(t.buf) {
		t.buf = append(t.buf, make([]byte, len(t.buf))...)
	}
	for range 100 {
		n, err := t.in.Read(t.buf[t.end:])
		t.end += n
		if err != nil {
			t.eof = true
			if err != io.EOF {
				t.failed = err
			}
		}
		if n > 0 || err != nil {
			return n > 0
		}
	}
	t.eof, t.failed = true, io.ErrNoProgress
	return false
}

// row reads the next row into fields. It is false at the end of the file and
// after a failure; err tells which. Rows with a fault are skipped.
func (t *table) row() bool {
	for t.failed == nil {
		length, ok := t.lineEnd(0)
		if !ok {
			return false
		}
		t.line = t.next
		if bytes.IndexByte(t.buf[t.pos:t.pos+length], '"') >= 0 {
			if t.quotedRow(length) {
				return true
			}
			continue
		}
		line := t.take(length)
		if n := len(line); n > 0 && line[n-1] == '\r' {
			line = line[:n-1]
		}
		if len(line) == 0 || blank(line) && bytes.IndexByte(line, t.delim) < 0 {
			continue
		}
		t.split(line)
		return true
	}
	return false
}

// take is the next length bytes, and goes on to the line after them.
func (t *table) take(length int) []byte {
	line := t.buf[t.pos : t.pos+length]
	t.pos = min(t.pos+length+1, t.end)
	t.next++
	return line
}

func blank(line []byte) bool { return len(bytes.TrimSpace(line)) == 0 }

// lineEnd is the offset from pos of the first line end at or after from, or of
// the end of the file. ok is false where nothing is left or the row is too
// long.
func (t *table) lineEnd(from int) (offset int, ok bool) {
	from = min(from, t.end-t.pos)
	for {
		if i := bytes.IndexByte(t.buf[t.pos+from:t.end], '\n'); i >= 0 {
			return from + i, true
		}
		from = t.end - t.pos
		if from > maxRecord {
			t.failed = errLong
			return 0, false
		}
		if !t.fill() {
			return t.end - t.pos, t.failed == nil && t.end > t.pos
		}
	}
}

var errLong = fmt.Errorf("a row longer than %d MiB", maxRecord>>20)

// split cuts a line without quotes.
func (t *table) split(line []byte) {
	t.fields = t.fields[:0]
	begin, delim := 0, t.delim
	for i := 0; i < len(line); i++ {
		if line[i] == delim {
			t.fields = append(t.fields, trim(line[begin:i]))
			begin = i + 1
		}
	}
	t.fields = append(t.fields, trim(line[begin:]))
}

func trim(f []byte) []byte {
	if n := len(f); n > 0 && (f[0] <= ' ' || f[n-1] <= ' ') {
		return bytes.Trim(f, " \t")
	}
	return f
}

// quotedRow cuts a row that has quotes in it and may go on over several lines;
// its first line is length bytes. It is false for a row with a fault.
func (t *table) quotedRow(length int) bool {
	open := bytes.Count(t.buf[t.pos:t.pos+length], []byte{'"'})%2 == 1
	lines := 1
	for open {
		end, ok := t.lineEnd(length + 1)
		if !ok || end <= length {
			if t.failed == nil || t.failed == errLong {
				t.faults.Add(t.fault(0, "a row with a quote that is never closed", `a closing quote; "" for a quote inside a quoted field`))
			}
			t.pos = t.end
			return false
		}
		open = bytes.Count(t.buf[t.pos+length:t.pos+end], []byte{'"'})%2 == 0
		length = end
		lines++
	}
	row := t.take(length)
	t.next += lines - 1
	return t.splitQuoted(bytes.TrimSuffix(row, []byte{'\r'}))
}

// splitQuoted cuts a whole row, unescaping quoted fields where they lie.
func (t *table) splitQuoted(row []byte) bool {
	t.fields = t.fields[:0]
	for {
		lead := 0
		for lead < len(row) && row[lead] == ' ' {
			lead++
		}
		var rest []byte
		if lead < len(row) && row[lead] == '"' {
			field, after, ok := unquote(row[lead+1:])
			if !ok {
				t.faults.Add(t.fault(len(t.fields), "a quote that is never closed", `a closing quote; "" for a quote inside a quoted field`))
				return false
			}
			t.fields = append(t.fields, field)
			rest = bytes.TrimLeft(after, " ")
			if len(rest) > 0 && rest[0] != t.delim {
				t.faults.Add(t.fault(len(t.fields)-1, "text after a closing quote: "+show(rest), `a delimiter there, or "" for a quote inside a quoted field`))
				return false
			}
		} else {
			field := row
			if i := bytes.IndexByte(row, t.delim); i >= 0 {
				field = row[:i]
			}
			rest = row[len(field):]
			if bytes.IndexByte(field, '"') >= 0 {
				t.faults.Add(t.fault(len(t.fields), "a quote inside "+show(field), `no quotes, or the whole field in quotes with "" for each quote inside`))
				return false
			}
			t.fields = append(t.fields, trim(field))
		}
		if len(rest) == 0 {
			return true
		}
		row = rest[1:]
	}
}

// unquote unescapes in place what follows an opening quote, up to the closing
// one.
func unquote(b []byte) (field, after []byte, ok bool) {
	write := 0
	for read := 0; read < len(b); read++ {
		if b[read] == '"' {
			if read+1 == len(b) || b[read+1] != '"' {
				return b[:write:write], b[read+1:], true
			}
			read++
		}
		b[write] = b[read]
		write++
	}
	return nil, nil, false
}

// err is the error that ended the rows, if any.
func (t *table) err() error {
	switch {
	case t.failed == errLong:
		return oneFault(Fault{File: t.in.path, Line: t.next, Found: errLong.Error(), Want: t.what + ", with a line end after each row"})
	case t.failed != nil:
		return t.in.readFault(t.failed, t.next)
	}
	return nil
}

// fault is at a field of the current row, 0-based.
func (t *table) fault(field int, found, want string) Fault {
	return Fault{File: t.in.path, Line: t.line, Column: field + 1, Found: found, Want: want}
}

// show quotes a value for a message, cut short where it is long.
func show(value []byte) string {
	const most = 40
	if len(value) > most {
		return fmt.Sprintf("%q…", value[:most])
	}
	return fmt.Sprintf("%q", value)
}

func lower(s string) string { return strings.ToLower(s) }
