package store

import "math/bits"

// bit is an adaptive forecast of a binary decision: p/65536 is how likely a 0 is, by
// the n decisions seen so far.
type bit struct {
	p uint16
	n uint8
}

// bitMemory is how many decisions a forecast looks back in the end, leastP the
// least likelihood that it may give either outcome.
const (
	bitMemory = 60
	leastP    = 24
)

func (b *bit) likely() uint32 {
	if b.n == 0 {
		return 1 << 15
	}
	return uint32(b.p)
}

// learn moves the forecast towards outcome by 1/(n + 1.5), so that the first few
// decisions weigh as they would in a count.
func (b *bit) learn(outcome int) {
	p := int32(b.likely())
	p += (int32(1-outcome)<<16 - p) * 2 / (2*int32(b.n) + 3)
	b.p = uint16(min(max(p, leastP), 1<<16-leastP))
	if b.n < bitMemory {
		b.n++
	}
}

// bitWriter is an arithmetic coder of binary decisions: it narrows the interval
// [low, low+width) by each of them and writes the bytes that are settled.
type bitWriter struct {
	out     []byte
	low     uint64
	width   uint32
	pending int  // 0xff bytes after held that a carry would change
	held    byte // the last byte that a carry can still change
	begun   bool
}

func newBitWriter(out []byte) bitWriter { return bitWriter{out: out, width: 1<<32 - 1} }

func (w *bitWriter) put(outcome int, b *bit) {
	bound := uint32(uint64(w.width) * uint64(b.likely()) >> 16)
	if outcome == 0 {
		w.width = bound
	} else {
		w.low += uint64(bound)
		w.width -= bound
	}
	b.learn(outcome)
	w.settle()
}

// even writes the n low bits of u, each as likely 0 as 1, a byte at a time.
func (w *bitWriter) even(u uint64, n int) {
	for n > 0 {
		k := min(n, 8)
		n -= k
		w.width >>= k
		w.low += uint64(w.width) * (u >> n & (1<<k - 1))
		w.settle()
	}
}

func (w *bitWriter) settle() {
	for w.width < 1<<24 {
		w.width <<= 8
		w.shift()
	}
}

// shift moves the top byte out of low.
func (w *bitWriter) shift() {
	if w.low < 0xff000000 || w.low >= 1<<32 {
		carry := byte(w.low >> 32)
		if w.begun {
			w.out = append(w.out, w.held+carry)
		}
		for ; w.pending > 0; w.pending-- {
			w.out = append(w.out, 0xff+carry)
		}
		w.held, w.begun = byte(w.low>>24), true
	} else {
		w.pending++
	}
	w.low = w.low & 0x00ffffff << 8
}

// finish ends with the number in the interval that has the most zero bytes at its
// end, and leaves those out.
func (w *bitWriter) finish(begin int) []byte {
	for n := 32; n > 0; n -= 8 {
		if v := (w.low + uint64(w.width) - 1) >> n << n; v >= w.low {
			w.low = v
			break
		}
	}
	for range 5 {
		w.shift()
	}
	for len(w.out) > begin && w.out[len(w.out)-1] == 0 {
		w.out = w.out[:len(w.out)-1]
	}
	return w.out
}

// bitReader reads what a bitWriter wrote. After the end it reads zero bytes.
type bitReader struct {
	rest  []byte
	code  uint32 // less low
	width uint32
}

func newBitReader(b []byte) bitReader {
	r := bitReader{rest: b, width: 1<<32 - 1}
	for range 4 {
		r.code = r.code<<8 | uint32(r.next())
	}
	return r
}

func (r *bitReader) next() byte {
	if len(r.rest) == 0 {
		return 0
	}
	c := r.rest[0]
	r.rest = r.rest[1:]
	return c
}

func (r *bitReader) get(b *bit) (outcome int) {
	bound := uint32(uint64(r.width) * uint64(b.likely()) >> 16)
	if r.code < bound {
		r.width = bound
	} else {
		r.code -= bound
		r.width -= bound
		outcome = 1
	}
	b.learn(outcome)
	r.settle()
	return outcome
}

func (r *bitReader) even(n int) (u uint64) {
	for n > 0 {
		k := min(n, 8)
		n -= k
		r.width >>= k
		part := min(r.code/r.width, 1<<k-1) // more only where no writer wrote
		r.code -= part * r.width
		u = u<<k | uint64(part)
		r.settle()
	}
	return u
}

func (r *bitReader) settle() {
	for r.width < 1<<24 {
		r.width <<= 8
		r.code = r.code<<8 | uint32(r.next())
	}
}

// numbers codes signed integers, small ones in few bits: first how many bits the
// magnitude has, by what that was for the number before; then the sign, by the one
// before; then the magnitude's bits below its highest, of which the first
// modelled are forecast and the others are taken as even.
type numbers struct {
	sizes     [4][1 << sizeBits]bit
	large     [1 << largeBits]bit
	signs     [3]bit
	fractions [manySizes][1 << modelled]bit
	size      int // of the number before
	sign      int // 0 none, 1 positive, 2 negative
}

const (
	sizeBits  = 4             // sizes below manySizes-1 are told in these
	manySizes = 1 << sizeBits // the last of them says that the size follows
	largeBits = 6             // in these, less what can be told without
	modelled  = 3
)

// past is the context that the size before makes.
func (n *numbers) past() *[1 << sizeBits]bit {
	switch {
	case n.size == 0:
		return &n.sizes[0]
	case n.size <= 2:
		return &n.sizes[1]
	case n.size <= 4:
		return &n.sizes[2]
	}
	return &n.sizes[3]
}

func (n *numbers) put(w *bitWriter, x int64) {
	magnitude := uint64(x)
	if x < 0 {
		magnitude = -magnitude
	}
	size := bits.Len64(magnitude)
	putTree(w, n.past()[:], min(size, manySizes-1), sizeBits)
	if size >= manySizes-1 {
		putTree(w, n.large[:], size-(manySizes-1), largeBits)
	}
	n.size = size
	if size == 0 {
		return
	}
	negative := 0
	if x < 0 {
		negative = 1
	}
	w.put(negative, &n.signs[n.sign])
	n.sign = 1 + negative
	below := size - 1
	told := min(below, modelled)
	below -= told
	if told > 0 {
		putTree(w, n.fractions[min(size, manySizes-1)][:], int(magnitude>>below)&(1<<told-1), told)
	}
	w.even(magnitude, below)
}

func (n *numbers) get(r *bitReader) int64 {
	size := getTree(r, n.past()[:], sizeBits)
	if size == manySizes-1 {
		size += getTree(r, n.large[:], largeBits)
	}
	n.size = size
	if size == 0 {
		return 0
	}
	negative := r.get(&n.signs[n.sign])
	n.sign = 1 + negative
	magnitude := uint64(1)
	below := min(size, 64) - 1
	told := min(below, modelled)
	below -= told
	if told > 0 {
		magnitude = magnitude<<told | uint64(getTree(r, n.fractions[min(size, manySizes-1)][:], told))
	}
	magnitude = magnitude<<below | r.even(below)
	if negative != 0 {
		return -int64(magnitude)
	}
	return int64(magnitude)
}

// putTree writes a number of n bits, the highest first, each forecast by those above it.
func putTree(w *bitWriter, nodes []bit, u, n int) {
	node := 1
	for n--; n >= 0; n-- {
		b := u >> n & 1
		w.put(b, &nodes[node])
		node = node<<1 | b
	}
}

func getTree(r *bitReader, nodes []bit, n int) int {
	node := 1
	for range n {
		node = node<<1 | r.get(&nodes[node])
	}
	return node - 1<<n
}
