package resistor

// postorder renumbers the places before the cut along the elimination tree,
// children just before their parent, the parent of a place being the first of
// its column: exact elimination in any such order gives the same factor (Liu
// 1990), and what lies together in the network then lies together in memory.
// Cost: O(entries).
func (f *factor) postorder() {
	n := f.cut
	child, sibling := make([]int32, len(f.order)+1), make([]int32, n)
	for i := range child {
		child[i] = none
	}
	for i := n - 1; i >= 0; i-- { // lists come out ascending
		parent := int32(len(f.order)) // roots hang together
		for _, j := range f.row[f.start[i]:f.start[i+1]] {
			parent = min(parent, j)
		}
		sibling[i] = child[parent]
		child[parent] = int32(i)
	}
	place := make([]int32, len(f.order)) // the new one of each place
	for i := range place {
		place[i] = int32(i)
	}
	was := make([]int32, 0, n) // the old one
	var stack []int32
	for root := n; root <= len(f.order); root++ {
		stack = append(stack[:0], int32(root))
		for len(stack) > 0 {
			top := stack[len(stack)-1]
			if c := child[top]; c != none {
				child[top] = sibling[c]
				stack = append(stack, c)
				continue
			}
			stack = stack[:len(stack)-1]
			if int(top) < n {
				place[top] = int32(len(was))
				was = append(was, top)
			}
		}
	}
	f.permute(was, place)
}

// permute moves the columns of place was[i] to i.
func (f *factor) permute(was, place []int32) {
	n, entries := f.cut, f.start[f.cut]
	order, start := make([]int32, n), make([]int, n+1)
	row, value, inverse := make([]int32, 0, entries), make([]float64, 0, entries), make([]float64, n)
	for i, old := range was {
		order[i], inverse[i] = f.order[old], f.inverse[old]
		for k := f.start[old]; k < f.start[old+1]; k++ {
			row, value = append(row, place[f.row[k]]), append(value, f.value[k])
		}
		start[i+1] = len(row)
	}
	copy(f.order, order)
	copy(f.start, start)
	copy(f.row, row)
	copy(f.value, value)
	copy(f.inverse, inverse)
	for i, v := range order {
		f.place[v] = int32(i)
	}
}
