package resistor

// queue hands out nodes by ascending degree, as long as the degrees told to it
// are right. Nodes of one degree come out last in, first out, so the order
// depends on nothing but the calls. Degrees past the last bucket share it.
// Cost: O(1) a call, and for next the buckets passed.
type queue struct {
	head       []int32 // first node of each bucket, none where empty
	after, was []int32 // neighbours in the bucket
	bucket     []int32
	least      int
}

const none = int32(-1)

func newQueue(n int) *queue {
	q := &queue{head: make([]int32, min(n, 1<<12)+1), after: make([]int32, n), was: make([]int32, n), bucket: make([]int32, n)}
	for i := range q.head {
		q.head[i] = none
	}
	for v := range q.bucket {
		q.bucket[v] = none
	}
	return q
}

// set moves node v to the bucket of a degree.
func (q *queue) set(v int32, degree int) {
	b := int32(min(degree, len(q.head)-1))
	if q.bucket[v] == b {
		return
	}
	q.take(v)
	q.bucket[v], q.was[v], q.after[v] = b, none, q.head[b]
	if q.head[b] != none {
		q.was[q.head[b]] = v
	}
	q.head[b] = v
	q.least = min(q.least, int(b))
}

// take takes node v out, if it is in.
func (q *queue) take(v int32) {
	b := q.bucket[v]
	if b == none {
		return
	}
	if q.was[v] == none {
		q.head[b] = q.after[v]
	} else {
		q.after[q.was[v]] = q.after[v]
	}
	if q.after[v] != none {
		q.was[q.after[v]] = q.was[v]
	}
	q.bucket[v] = none
}

// next takes out a node of least degree; none when all are out.
func (q *queue) next() int32 {
	for ; q.least < len(q.head); q.least++ {
		if v := q.head[q.least]; v != none {
			q.take(v)
			return v
		}
	}
	return none
}
