package sparkplug

// sequence follows the numbers of a node's messages, 0 to 255 and from there to 0 again.
type sequence struct {
	next    uint8
	begun   bool
	missing [4]uint64 // a bit a number that was passed over
	open    int       // how many of them there are
}

// start begins with the number of a birth, which may be any.
func (q *sequence) start(number uint64) {
	*q = sequence{next: uint8(number) + 1, begun: true}
}

// half is how far ahead a number may be: beyond, it is one from before, or of another
// sequence.
const half = 128

// take notes a number. Gap is how many before it are missing; late says that it is one
// that was.
func (q *sequence) take(number uint64) (gap int, late bool) {
	n := uint8(number)
	if !q.begun {
		q.start(number)
		return 0, false
	}
	ahead := n - q.next
	switch {
	case ahead == 0:
		q.found(n)
		q.next++
		return 0, false
	case q.found(n):
		return 0, true
	case ahead >= half:
		q.start(number)
		return 1, false
	}
	for ; q.next != n; q.next++ {
		q.found(q.next)
		gap++
		q.missing[q.next/64] |= 1 << (q.next % 64)
		q.open++
	}
	q.next++
	return gap, false
}

// found notes that a number is not missing, and reports whether it was.
func (q *sequence) found(n uint8) bool {
	bit := uint64(1) << (n % 64)
	if q.open == 0 || q.missing[n/64]&bit == 0 {
		return false
	}
	q.missing[n/64] &^= bit
	q.open--
	return true
}
