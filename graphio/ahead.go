package graphio

import "io"

// An ahead reads the next blocks in the background while its user works on
// this one: reading, summing up and expanding a file take as long as splitting
// its rows.
type ahead struct {
	filled chan block
	empty  chan []byte
	quit   chan struct{}
	ended  chan struct{}
	block  block
	at     int
}

type block struct {
	data []byte
	err  error // after data
}

const (
	aheadBlocks = 3
	aheadSize   = 1 << 18
)

func newAhead(from io.Reader) *ahead {
	a := &ahead{
		filled: make(chan block, aheadBlocks),
		empty:  make(chan []byte, aheadBlocks),
		quit:   make(chan struct{}),
		ended:  make(chan struct{}),
	}
	for range aheadBlocks {
		a.empty <- nil // blocks are made when first needed
	}
	go a.run(from)
	return a
}

func (a *ahead) run(from io.Reader) {
	defer close(a.ended)
	for {
		var b block
		select {
		case b.data = <-a.empty:
		case <-a.quit:
			return
		}
		if b.data == nil {
			b.data = make([]byte, aheadSize)
		}
		b.data, b.err = readBlock(from, b.data[:aheadSize])
		a.filled <- b
		if b.err != nil {
			return
		}
	}
}

// readBlock reads until p is full or an error, which it keeps as it is.
func readBlock(from io.Reader, p []byte) ([]byte, error) {
	filled, idle := 0, 0
	for filled < len(p) {
		n, err := from.Read(p[filled:])
		filled += n
		if err != nil {
			return p[:filled], err
		}
		if idle++; n > 0 {
			idle = 0
		} else if idle > 100 {
			return p[:filled], io.ErrNoProgress
		}
	}
	return p, nil
}

// Read copies from the current block, and waits for the next where it is used
// up.
func (a *ahead) Read(p []byte) (int, error) {
	for a.at == len(a.block.data) {
		if a.block.err != nil {
			return 0, a.block.err
		}
		if a.block.data != nil {
			a.empty <- a.block.data
		}
		a.block, a.at = <-a.filled, 0
	}
	n := copy(p, a.block.data[a.at:])
	a.at += n
	return n, nil
}

// stop ends the background reading and waits for it; a read under way must end
// on its own, as it does when the file is closed.
func (a *ahead) stop() {
	close(a.quit)
	<-a.ended
}
