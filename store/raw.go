package store

import (
	"encoding/binary"
	"hash/fnv"
	"io"
	"os"
)

const (
	metaMagic    = 0xED0CDAED
	metaPageSize = pageHead + 8
	metaRoot     = pageHead + 16
	metaSum      = pageHead + 56

	// deepest bounds how many pages lead to one, and longestRun the bytes of one with what
	// follows on it; far more than any history has.
	deepest    = 32
	longestRun = 64 << 20
)

// rawFile is a database file that may be damaged anywhere. It is read page by page,
// nothing in it is trusted, and no page is read twice on one walk.
type rawFile struct {
	file     io.ReaderAt
	size     int64
	pageSize int64
	metas    []rawMeta // those that are sound, newest first
	reached  []bool    // pages that a walk with marks came to
}

type rawMeta struct{ root, id uint64 }

func openRaw(f io.ReaderAt, size int64) *rawFile {
	r := &rawFile{file: f, size: size, pageSize: int64(os.Getpagesize())}
	for pageSize := int64(512); pageSize <= 64<<10; pageSize *= 2 {
		for n := range int64(2) {
			if m, ok := r.meta(n*pageSize, pageSize); ok && (len(r.metas) == 0 || r.metas[0] != m) {
				r.pageSize = pageSize
				r.metas = append(r.metas, m)
			}
		}
	}
	if len(r.metas) == 2 && r.metas[1].id > r.metas[0].id {
		r.metas[0], r.metas[1] = r.metas[1], r.metas[0]
	}
	r.reached = make([]bool, r.size/r.pageSize+1)
	return r
}

// meta reads the meta page at an offset, if it is sound and of that page size.
func (r *rawFile) meta(at, pageSize int64) (m rawMeta, ok bool) {
	b := make([]byte, metaSum+8)
	if _, err := r.file.ReadAt(b, at); err != nil {
		return m, false
	}
	sum := fnv.New64a()
	sum.Write(b[pageHead:metaSum])
	ok = binary.LittleEndian.Uint32(b[pageHead:]) == metaMagic && int64(binary.LittleEndian.Uint32(b[metaPageSize:])) == pageSize &&
		binary.LittleEndian.Uint64(b[metaSum:]) == sum.Sum64()
	return rawMeta{binary.LittleEndian.Uint64(b[metaRoot:]), binary.LittleEndian.Uint64(b[metaID:])}, ok
}

// run reads a leaf or branch with what follows on it, nil where there is none.
func (r *rawFile) run(id uint64) []byte {
	if id < 2 || id >= uint64(r.size/r.pageSize) {
		return nil
	}
	head := make([]byte, pageHead)
	if _, err := r.file.ReadAt(head, int64(id)*r.pageSize); err != nil {
		return nil
	}
	if flags := binary.LittleEndian.Uint16(head[8:]); flags != pageLeaf && flags != pageBranch {
		return nil
	}
	n := (int64(binary.LittleEndian.Uint32(head[12:])) + 1) * r.pageSize
	if n = min(n, r.size-int64(id)*r.pageSize); n > longestRun {
		n = r.pageSize
	}
	b := make([]byte, n)
	if got, err := r.file.ReadAt(b, int64(id)*r.pageSize); err != nil {
		b = b[:got]
	}
	return b
}

// element is one of a page: a key and its value, or a child.
type element struct {
	bucket     bool
	key, value []byte
	child      uint64 // of a branch
}

// elements takes a page apart. bad counts those that lie outside of it.
func elements(b []byte) (all []element, bad int) {
	if len(b) < pageHead {
		return nil, 1
	}
	flags, count := binary.LittleEndian.Uint16(b[8:]), int(binary.LittleEndian.Uint16(b[10:]))
	if flags != pageLeaf && flags != pageBranch {
		return nil, 1
	}
	for i := range count {
		at := pageHead + i*elementHead
		if at+elementHead > len(b) {
			return all, bad + count - i
		}
		e, word := element{}, func(n int) uint64 { return uint64(binary.LittleEndian.Uint32(b[at+n:])) }
		position, key, value := word(4), word(8), word(12)
		if flags == pageBranch {
			position, key, value = word(0), word(4), 0
			e.child = binary.LittleEndian.Uint64(b[at+8:])
		} else {
			e.bucket = word(0)&elementBucket != 0
		}
		begin := uint64(at) + position
		if begin+key+value > uint64(len(b)) {
			bad++
			continue
		}
		e.key, e.value = b[begin:begin+key], b[begin+key:begin+key+value]
		all = append(all, e)
	}
	return all, bad
}

// pageWalk is one way through the pages.
type pageWalk struct {
	*rawFile
	seen  map[uint64]bool
	marks bool  // it is one of a tree: what it reaches is reached for good, and no page out of its place counts
	bad   int64 // pages and elements that cannot be read
}

func (r *rawFile) newWalk() *pageWalk { return &pageWalk{rawFile: r, seen: map[uint64]bool{}} }

// tree calls leaf with what lies in the leaves below a page, in order.
func (w *pageWalk) tree(id uint64, depth int, leaf func(element)) {
	if id >= uint64(len(w.reached)) || w.seen[id] || depth > deepest {
		w.bad++
		return
	}
	w.seen[id] = true
	b := w.run(id)
	if w.marks && len(b) >= pageHead && binary.LittleEndian.Uint64(b) != id {
		w.bad++
		return
	}
	w.reached[id] = w.reached[id] || w.marks
	all, bad := elements(b)
	w.bad += int64(bad)
	isLeaf := len(b) >= pageHead && binary.LittleEndian.Uint16(b[8:]) == pageLeaf
	for _, e := range all {
		if isLeaf {
			leaf(e)
		} else {
			w.tree(e.child, depth+1, leaf)
		}
	}
}

// bucket calls leaf with what lies in a bucket whose header, with its page if that lies
// within, is value.
func (w *pageWalk) bucket(value []byte, leaf func(element)) {
	if len(value) < bucketHead {
		w.bad++
		return
	}
	if root := binary.LittleEndian.Uint64(value); root != 0 {
		w.tree(root, 0, leaf)
		return
	}
	all, bad := elements(value[bucketHead:])
	w.bad += int64(bad)
	for _, e := range all {
		leaf(e)
	}
}

// records returns what lies in a bucket under keyRecords.
func (w *pageWalk) records(header []byte) (b []byte) {
	w.bucket(header, func(e element) {
		if string(e.key) == string(keyRecords) && !e.bucket {
			b = e.value
		}
	})
	return b
}
