package store

import (
	"bytes"
	"cmp"
	"encoding/binary"
	"fmt"
	"io"
	"runtime"
	"sync"
	"sync/atomic"

	bolt "go.etcd.io/bbolt"
)

// The parts of bbolt's page format that pageCheck reads. A page is a header (uint64 id,
// uint16 flags, uint16 count, uint32 pages that follow on it), then count
// elements, then keys and values. All is little-endian.
const (
	pageHead    = 16
	elementHead = 16
	bucketHead  = 16 // uint64 root page, uint64 sequence, before an inline page

	pageBranch   = 0x01
	pageLeaf     = 0x02
	pageFreeList = 0x10

	// Where a meta page tells the page of the list of free pages, and its transaction.
	metaFree = pageHead + 32
	metaID   = pageHead + 48

	noFreeList = 1<<64 - 1
	manyFree   = 1<<16 - 1 // as a count: the count follows as uint64

	elementBucket = 0x01
)

// pageCheck goes through the pages of a database: each must be in the file, be
// what its place asks for, be reached once, and have its keys in order. It reads
// the file and does not map it, and follows no pointer before it has looked at
// it, so that no damage can stop the program or keep it going for ever. bbolt
// walks the same pages when it opens the file, in a goroutine of its own where a panic
// cannot be caught.
//
// Branches are shared among as many goroutines as can run.
type pageCheck struct {
	file     io.ReaderAt
	pageSize int64
	seen     []atomic.Bool // by page
	spare    sync.Pool     // of pages read before, to read others into
	helpers  chan struct{} // one for each goroutine that helps
}

// checkPages checks what is reached from the root of tx in file, of length size.
func checkPages(tx *bolt.Tx, file io.ReaderAt, size int64) error {
	if size < tx.Size() {
		return fmt.Errorf("it has %d bytes of %d", size, tx.Size())
	}
	pageSize := int64(tx.DB().Info().PageSize)
	c := pageCheck{
		file: file, pageSize: pageSize,
		seen:    make([]atomic.Bool, tx.Size()/pageSize),
		spare:   sync.Pool{New: func() any { b := make([]byte, pageSize); return &b }},
		helpers: make(chan struct{}, runtime.GOMAXPROCS(0)-1),
	}
	if err := c.page(uint64(tx.Cursor().Bucket().Root()), nil, nil); err != nil {
		return err
	}
	return c.freePages(uint64(tx.ID()))
}

// page checks a page and all below it. Its keys must lie in [low, high); nil is
// no bound.
func (c *pageCheck) page(id uint64, low, high []byte) error {
	if id < 2 || id >= uint64(len(c.seen)) {
		return fmt.Errorf("page %d does not exist", id)
	}
	buffer := c.spare.Get().(*[]byte)
	defer c.spare.Put(buffer)
	p := page{file: c.file, offset: int64(id) * c.pageSize, first: *buffer}
	if _, err := c.file.ReadAt(p.first, p.offset); err != nil {
		return fmt.Errorf("page %d: %w", id, err)
	}
	if got := binary.LittleEndian.Uint64(p.first); got != id {
		return fmt.Errorf("page %d calls itself %d", id, got)
	}
	more := uint64(binary.LittleEndian.Uint32(p.first[12:]))
	if id+more >= uint64(len(c.seen)) {
		return fmt.Errorf("page %d goes beyond the end", id)
	}
	for i := id; i <= id+more; i++ {
		if c.seen[i].Swap(true) {
			return fmt.Errorf("page %d is reached twice", i)
		}
	}
	p.length = int64(more+1) * c.pageSize
	if err := c.elements(&p, low, high); err != nil {
		return fmt.Errorf("page %d: %w", id, err)
	}
	return nil
}

// page is one page with what follows on it; first holds its beginning.
type page struct {
	file   io.ReaderAt
	offset int64
	first  []byte
	length int64
}

// bytes returns n bytes at offset at of the page.
func (p *page) bytes(at, n int64) ([]byte, error) {
	if at < 0 || n < 0 || at+n > p.length {
		return nil, fmt.Errorf("an element lies outside")
	}
	if at+n <= int64(len(p.first)) {
		return p.first[at : at+n], nil
	}
	b := make([]byte, n)
	_, err := p.file.ReadAt(b, p.offset+at)
	return b, err
}

func (c *pageCheck) elements(p *page, low, high []byte) error {
	flags := binary.LittleEndian.Uint16(p.first[8:])
	count := int64(binary.LittleEndian.Uint16(p.first[10:]))
	switch flags {
	case pageLeaf:
		return c.leaf(p, count, low, high)
	case pageBranch:
		return c.branch(p, count, low, high)
	}
	return fmt.Errorf("flags are %#x, neither a leaf's nor a branch's", flags)
}

func (c *pageCheck) leaf(p *page, count int64, low, high []byte) error {
	var before []byte
	next := pageHead + count*elementHead
	for i := range count {
		at := pageHead + i*elementHead
		e, err := p.bytes(at, elementHead)
		if err != nil {
			return err
		}
		at += int64(binary.LittleEndian.Uint32(e[4:]))
		keyLength := int64(binary.LittleEndian.Uint32(e[8:]))
		valueLength := int64(binary.LittleEndian.Uint32(e[12:]))
		if at != next || at+keyLength+valueLength > p.length {
			return fmt.Errorf("value %d is not in its place", i)
		}
		next = at + keyLength + valueLength
		key, err := p.bytes(at, keyLength)
		if err != nil {
			return err
		}
		if err := inOrder(before, key, low, high); err != nil {
			return err
		}
		before = key
		if binary.LittleEndian.Uint32(e)&elementBucket != 0 {
			value, err := p.bytes(at+keyLength, valueLength)
			if err != nil {
				return err
			}
			if err := c.bucket(value); err != nil {
				return fmt.Errorf("bucket %q: %w", key, err)
			}
		}
	}
	return nil
}

// bucket checks a bucket by its header, and all in it.
func (c *pageCheck) bucket(value []byte) error {
	if len(value) < bucketHead {
		return fmt.Errorf("its header has %d bytes", len(value))
	}
	if root := binary.LittleEndian.Uint64(value); root != 0 {
		return c.page(root, nil, nil)
	}
	inline := value[bucketHead:]
	if len(inline) < pageHead {
		return fmt.Errorf("its page has %d bytes", len(inline))
	}
	return c.elements(&page{first: inline, length: int64(len(inline))}, nil, nil)
}

func (c *pageCheck) branch(p *page, count int64, low, high []byte) error {
	if count == 0 {
		return fmt.Errorf("branch without children")
	}
	keys, children := make([][]byte, count), make([]uint64, count)
	next := pageHead + count*elementHead
	for i := range count {
		at := pageHead + i*elementHead
		e, err := p.bytes(at, elementHead)
		if err != nil {
			return err
		}
		at += int64(binary.LittleEndian.Uint32(e))
		if at != next {
			return fmt.Errorf("key %d is not in its place", i)
		}
		if keys[i], err = p.bytes(at, int64(binary.LittleEndian.Uint32(e[4:]))); err != nil {
			return err
		}
		next += int64(len(keys[i]))
		children[i] = binary.LittleEndian.Uint64(e[8:])
	}
	return c.children(keys, children, low, high)
}

// children checks all children of a branch, half of them in another goroutine if one is
// to be had.
func (c *pageCheck) children(keys [][]byte, children []uint64, low, high []byte) error {
	half := len(children) / 2
	if half == 0 {
		return c.some(keys, children, 0, len(children), low, high)
	}
	select {
	case c.helpers <- struct{}{}:
	default:
		return c.some(keys, children, 0, len(children), low, high)
	}
	other := make(chan error, 1)
	go func() {
		other <- c.some(keys, children, half, len(children), low, high)
		<-c.helpers
	}()
	return cmp.Or(c.some(keys, children, 0, half, low, high), <-other)
}

// some checks the children from one number to another.
func (c *pageCheck) some(keys [][]byte, children []uint64, from, to int, low, high []byte) error {
	for i := from; i < to; i++ {
		var before []byte
		next := high
		if i > 0 {
			before = keys[i-1]
		}
		if i+1 < len(keys) {
			next = keys[i+1]
		}
		if err := inOrder(before, keys[i], low, high); err != nil {
			return err
		}
		if err := c.page(children[i], keys[i], next); err != nil {
			return err
		}
	}
	return nil
}

// freePages checks the list of free pages, which is in the file after a Close and is
// not after a power cut: none of them may be in use. id is that of the transaction
// whose meta page counts.
func (c *pageCheck) freePages(id uint64) error {
	b := make([]byte, c.pageSize)
	for n := range int64(2) {
		if _, err := c.file.ReadAt(b, n*c.pageSize); err != nil {
			return fmt.Errorf("page %d: %w", n, err)
		}
		if binary.LittleEndian.Uint64(b[metaID:]) == id {
			list := binary.LittleEndian.Uint64(b[metaFree:])
			if list == noFreeList {
				return nil
			}
			if err := c.freeList(list); err != nil {
				return fmt.Errorf("list of free pages, page %d: %w", list, err)
			}
			return nil
		}
	}
	return fmt.Errorf("neither meta page is that of transaction %d", id)
}

func (c *pageCheck) freeList(id uint64) error {
	if id < 2 || id >= uint64(len(c.seen)) {
		return fmt.Errorf("it does not exist")
	}
	head := make([]byte, pageHead+8)
	if _, err := c.file.ReadAt(head, int64(id)*c.pageSize); err != nil {
		return err
	}
	more := uint64(binary.LittleEndian.Uint32(head[12:]))
	count, at := uint64(binary.LittleEndian.Uint16(head[10:])), int64(pageHead)
	if count == manyFree {
		count, at = binary.LittleEndian.Uint64(head[pageHead:]), at+8
	}
	if flags := binary.LittleEndian.Uint16(head[8:]); binary.LittleEndian.Uint64(head) != id || flags != pageFreeList ||
		id+more >= uint64(len(c.seen)) || count > uint64(len(c.seen)) || at+int64(count)*8 > int64(more+1)*c.pageSize {
		return fmt.Errorf("it is not such a list")
	}
	ids := make([]byte, count*8)
	if _, err := c.file.ReadAt(ids, int64(id)*c.pageSize+at); err != nil {
		return err
	}
	for i := id; i <= id+more; i++ {
		if c.seen[i].Swap(true) {
			return fmt.Errorf("page %d is reached twice", i)
		}
	}
	for ; len(ids) > 0; ids = ids[8:] {
		free := binary.LittleEndian.Uint64(ids)
		if free < 2 || free >= uint64(len(c.seen)) || c.seen[free].Swap(true) {
			return fmt.Errorf("page %d in it is not free", free)
		}
	}
	return nil
}

func inOrder(before, key, low, high []byte) error {
	if len(key) == 0 || before != nil && bytes.Compare(before, key) >= 0 ||
		low != nil && bytes.Compare(key, low) < 0 || high != nil && bytes.Compare(key, high) >= 0 {
		return fmt.Errorf("key % x is out of order", key)
	}
	return nil
}
