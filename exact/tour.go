package exact

// tour is the Euler tour of a rooted spanning tree, kept in blocks of limited
// length that form a doubly linked list. The tour holds two tokens a node: 2v
// where it enters v from its parent, 2v+1 where it leaves v again, so that the
// subtree of v is the range between them. Re-rooting a subtree rotates its
// range, cutting and linking it moves the range, and every one of these is a
// few splits of blocks. A potential is kept as an offset of its block plus a
// value of its node, so that the shift of a subtree touches blocks, not nodes:
// with blocks of about √n tokens every pivot costs O(√n) instead of O(n).
//
// Frederickson (1985) keeps trees in clusters of that size for the same reason;
// the tour in place of the clusters is what Henzinger & King (1999) use for
// connectivity.
type tour struct {
	shift uint    // blocks have 1 << shift slots
	slot  []int32 // the token in each slot
	block []block
	off   []int64 // offset of the potentials in each block
	free  []int32 // blocks not in use
	place []place // of each node
	head  int32   // first block
	carry []int32 // scratch of moveShort
}

type block struct {
	next, prev int32 // -1 at the ends
	size       int32 // slots in use, from the block's first
}

// place is where a node stands in the tour: the slots of its two tokens, and
// its potential less the offset of the block it is entered in.
type place struct {
	pot  int64
	slot [2]int32 // where it is entered, and where it is left
}

// newTour makes room for the tour of a tree of n nodes.
func newTour(n int) *tour {
	t := &tour{shift: 6, place: make([]place, n)}
	for 1<<(2*t.shift) < n/3 && t.shift < 10 {
		t.shift++
	}
	return t
}

// potential is that of node v.
func (t *tour) potential(v int32) int64 {
	p := &t.place[v]
	return t.off[p.slot[0]>>t.shift] + p.pot
}

// reset empties the tour, to be filled by push in tour order.
func (t *tour) reset() {
	t.block, t.slot, t.off, t.free = t.block[:0], t.slot[:0], t.off[:0], t.free[:0]
	t.head = t.newBlock(-1, 0)
}

// push appends a token to the tour. Blocks are left a quarter empty, for
// splits and joins to come.
func (t *tour) push(token int32) {
	last := int32(len(t.block)) - 1
	if int(t.block[last].size) >= 3<<t.shift/4 {
		last = t.newBlock(last, 0)
	}
	t.put(last, token)
}

// newBlock takes an unused block and links it in after block b (-1: nowhere).
func (t *tour) newBlock(b int32, off int64) int32 {
	var nb int32
	if k := len(t.free); k > 0 {
		nb = t.free[k-1]
		t.free = t.free[:k-1]
	} else {
		nb = int32(len(t.block))
		t.block = append(t.block, block{})
		t.off = append(t.off, 0)
		size := 1 << t.shift
		if have := len(t.slot); have+size <= cap(t.slot) {
			t.slot = t.slot[:have+size]
		} else {
			t.slot = append(t.slot, make([]int32, size)...)
		}
	}
	t.block[nb] = block{next: -1, prev: b}
	t.off[nb] = off
	if b >= 0 {
		next := t.block[b].next
		t.link(nb, next)
		t.link(b, nb)
	}
	return nb
}

func (t *tour) link(a, b int32) {
	if a >= 0 {
		t.block[a].next = b
	}
	if b >= 0 {
		t.block[b].prev = a
	}
}

// put appends a token to block b, which must have room.
func (t *tour) put(b, token int32) {
	s := b<<t.shift + t.block[b].size
	t.block[b].size++
	t.slot[s] = token
	t.setSlot(token, s)
}

// putAfter appends a token at the end of block b, in a new block after it if b
// is full. It returns the block the token stands in.
func (t *tour) putAfter(b, token int32) int32 {
	if t.block[b].size == 1<<t.shift {
		b = t.newBlock(b, 0)
	}
	t.put(b, token)
	return b
}

// setSlot notes where a token stands. Without a branch: tokens that enter and
// that leave come in no order a processor could foresee.
func (t *tour) setSlot(token, s int32) { t.place[token>>1].slot[token&1] = s }

// addIfEnter adds d to the potential of the token's node, if the token is where
// the node is entered; without a branch, again.
func (t *tour) addIfEnter(token int32, d int64) {
	t.place[token>>1].pot += d & (int64(token&1) - 1)
}

// splitAfter makes the token in slot s the last of its block and returns that
// block.
func (t *tour) splitAfter(s int32) int32 {
	b := s >> t.shift
	keep := s&(1<<t.shift-1) + 1
	size := t.block[b].size
	if keep == size {
		return b
	}
	nb := t.newBlock(b, t.off[b])
	from := t.slot[b<<t.shift+keep : b<<t.shift+size]
	base := nb << t.shift
	to := t.slot[base : int(base)+len(from)]
	for i, token := range from {
		to[i] = token
		t.setSlot(token, base+int32(i))
	}
	t.block[nb].size = size - keep
	t.block[b].size = keep
	return b
}

// settle joins block b with its neighbours on both sides where two together
// fill at most half a block. So any two neighbours hold more than half a block
// wherever the tour was cut or joined, and blocks stay few. b may be gone
// already, into a neighbour settled before.
func (t *tour) settle(b int32) {
	if t.block[b].size < 0 {
		return
	}
	t.absorb(b)
	if prev := t.block[b].prev; prev >= 0 {
		t.absorb(prev)
	}
}

// absorb moves the tokens of the block after b into b, if both together fill
// at most half a block.
func (t *tour) absorb(b int32) {
	next := t.block[b].next
	if next < 0 || t.block[b].size+t.block[next].size > 1<<t.shift/2 {
		return
	}
	base := next << t.shift
	d := t.off[next] - t.off[b]
	for _, token := range t.slot[base : base+t.block[next].size] {
		t.put(b, token)
		t.addIfEnter(token, d)
	}
	t.link(b, t.block[next].next)
	t.block[next].size = -1
	t.free = append(t.free, next)
}

// raise adds d to the potential of every node in the subtree of v.
func (t *tour) raise(v int32, d int64) {
	p := t.place[v]
	first, last := p.slot[0]>>t.shift, p.slot[1]>>t.shift
	if first == last {
		t.raiseSlots(p.slot[0], p.slot[1], d)
		return
	}
	t.raiseSlots(p.slot[0], first<<t.shift+t.block[first].size, d)
	for b := t.block[first].next; b != last; b = t.block[b].next {
		t.off[b] += d
	}
	t.raiseSlots(last<<t.shift, p.slot[1], d)
}

func (t *tour) raiseSlots(from, to int32, d int64) {
	for _, token := range t.slot[from:to] {
		t.addIfEnter(token, d)
	}
}

// move cuts the subtree of stem's last node, re-roots it at stem's first node
// and hangs it below node under, adding d to all its potentials. stem is the
// path from the new root of the subtree up to the old one.
func (t *tour) move(stem []int32, under int32, d int64) {
	if t.moveShort(stem, under, d) {
		return
	}
	c, w := stem[0], stem[len(stem)-1]
	// Cut: x..y are the blocks of the subtree of w without its own two tokens,
	// which are the last of block a before it and of block y.
	a := t.splitAfter(t.place[w].slot[0])
	t.splitAfter(t.place[w].slot[1])
	mid := int32(-1)
	if c != w {
		mid = t.splitAfter(t.place[c].slot[0])
	}
	potC, potW := t.potential(c), t.potential(w)
	x, y := t.block[a].next, t.place[w].slot[1]>>t.shift
	z := t.block[y].next
	t.block[a].size--
	t.block[y].size--
	t.link(a, z)
	t.block[x].prev, t.block[y].next = -1, -1
	joint := y
	if c != w { // Rotate: first what follows the entry of c, then the rest.
		rest := t.block[mid].next
		t.block[rest].prev, t.block[mid].next = -1, -1
		t.link(y, x)
		x, y = rest, mid
	}
	for b := x; b >= 0; b = t.block[b].next {
		t.off[b] += d
	}
	t.relabel(stem, potW+d)
	// Link, right after the entry of the node above.
	u := t.splitAfter(t.place[under].slot[0])
	after := t.block[u].next
	t.link(u, x)
	t.link(y, after)
	e := t.putAfter(u, 2*c)
	t.place[c].pot = potC + d - t.off[e]
	f := t.putAfter(y, 2*c+1)
	for _, b := range [...]int32{a, joint, e, f} {
		t.settle(b)
	}
}

// moveShort is move for a subtree that lies within a block, if the block it goes
// to has room: tokens are shifted, and no block is split. Of all moves that is
// the better part, since half of all subtrees moved have three nodes or fewer.
func (t *tour) moveShort(stem []int32, under int32, d int64) bool {
	c, w := stem[0], stem[len(stem)-1]
	first, last := t.place[w].slot[0], t.place[w].slot[1]
	u := t.place[under].slot[0]
	from, to := first>>t.shift, u>>t.shift
	size := last - first + 1
	if last>>t.shift != from || to != from && t.block[to].size+size > 1<<t.shift {
		return false
	}
	for i := len(stem) - 2; i >= 0; i-- { // as in relabel
		p := &t.place[stem[i]]
		t.slot[p.slot[1]], t.slot[p.slot[0]] = 2*stem[i+1], 2*stem[i+1]+1
	}
	t.carry = append(t.carry[:0], 2*c)
	if c != w {
		mid := t.place[c].slot[0]
		t.carry = append(t.carry, t.slot[mid+1:last]...)
		t.carry = append(t.carry, t.slot[first+1:mid+1]...)
	} else {
		t.carry = append(t.carry, t.slot[first+1:last]...)
	}
	t.carry = append(t.carry, 2*c+1)
	at := u + 1
	switch {
	case from != to:
		t.shiftDown(last+1, from<<t.shift+t.block[from].size, size)
		t.shiftUp(u+1, to<<t.shift+t.block[to].size, size)
		t.block[from].size -= size
		t.block[to].size += size
	case u > last:
		t.shiftDown(last+1, u+1, size)
		at -= size
	default:
		t.shiftUp(u+1, first, size)
	}
	d += t.off[from] - t.off[to]
	for i, token := range t.carry {
		t.slot[at+int32(i)] = token
		t.setSlot(token, at+int32(i))
		t.addIfEnter(token, d)
	}
	if from != to {
		t.settle(from)
	}
	return true
}

// shiftDown moves the tokens in slots from to end, end not included, by so many
// slots towards the front.
func (t *tour) shiftDown(from, end, by int32) {
	for s := from; s < end; s++ {
		token := t.slot[s]
		t.slot[s-by] = token
		t.setSlot(token, s-by)
	}
}

// shiftUp moves them towards the back.
func (t *tour) shiftUp(from, end, by int32) {
	for s := end - 1; s >= from; s-- {
		token := t.slot[s]
		t.slot[s+by] = token
		t.setSlot(token, s+by)
	}
}

// relabel turns the edges of the stem around. The slot where the tour left
// s[i] for s[i+1] is now where it enters s[i+1], and the other way about.
// potW is the new potential of the stem's last node, whose own slots are gone.
func (t *tour) relabel(stem []int32, potW int64) {
	for i := len(stem) - 2; i >= 0; i-- {
		child, parent := stem[i+1], stem[i] // as they are now
		pot := potW
		if i+2 < len(stem) {
			pot = t.potential(child)
		}
		enter, exit := t.place[parent].slot[1], t.place[parent].slot[0]
		t.place[child] = place{pot: pot - t.off[enter>>t.shift], slot: [2]int32{enter, exit}}
		t.slot[enter], t.slot[exit] = 2*child, 2*child+1
	}
}

// tokens are those of block b.
func (t *tour) tokens(b int32) []int32 {
	base := int(b) << t.shift
	return t.slot[base : base+int(t.block[b].size)]
}
