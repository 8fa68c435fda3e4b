package store

import (
	"encoding/binary"
	"fmt"
	"math"
	"sort"

	bolt "go.etcd.io/bbolt"
)

// registerFloats is how many floats a register holds, earlyRegisterFloats how many of
// them those hold that do not say how many, and firstRegisterFloats how many the first
// layout knew.
const (
	registerFloats      = 8
	earlyRegisterFloats = 7
	firstRegisterFloats = 4
)

// floats lists the fields in the order in which they are stored.
func (r *Register) floats() [registerFloats]*float64 {
	return [...]*float64{&r.Given, &r.Taken, &r.Measured, &r.Missing, &r.Bridged, &r.BridgedGiven, &r.BridgedTaken, &r.Uncertain}
}

// appendRegisters writes all registers as one value, so that none can be missing
// unnoticed, and how many floats each has: an odd number of bytes in all, where those
// that do not say it have an even one.
func appendRegisters(b []byte, all []Register) []byte {
	for _, r := range all {
		b = binary.LittleEndian.AppendUint32(b, r.Load)
		for _, f := range r.floats() {
			b = binary.LittleEndian.AppendUint64(b, math.Float64bits(*f))
		}
	}
	b = append(b, registerFloats)
	return binary.LittleEndian.AppendUint32(b, checksum(keyRegisters, b))
}

func parseRegisters(value []byte) ([]Register, error) {
	return parseRegistersOf(value, earlyRegisterFloats)
}

// parseRegistersOf reads registers, of the first few floats where they do not say how many.
func parseRegistersOf(value []byte, floats int) ([]Register, error) {
	n := len(value) - 4
	if n < 0 || binary.LittleEndian.Uint32(value[n:]) != checksum(keyRegisters, value[:n]) {
		return nil, errRecord
	}
	if n%2 != 0 {
		n--
		floats = int(value[n])
	}
	registerBytes := 4 + 8*floats
	if floats > registerFloats || n%registerBytes != 0 {
		return nil, errRecord
	}
	all := make([]Register, n/registerBytes)
	for i := range all {
		b := value[i*registerBytes:]
		all[i].Load = binary.LittleEndian.Uint32(b)
		fields := all[i].floats()
		for j, f := range fields[:floats] {
			*f = math.Float64frombits(binary.LittleEndian.Uint64(b[4+8*j:]))
		}
	}
	return all, nil
}

// putRegisters replaces the registers of the loads in changed.
func putRegisters(tx *bolt.Tx, changed []Register) error {
	bucket := tx.Bucket(bucketRegisters)
	all, err := parseRegisters(bucket.Get(keyRegisters))
	if err != nil {
		return fmt.Errorf("%w: registers: %w", ErrDamaged, err)
	}
	for _, r := range changed {
		i := sort.Search(len(all), func(i int) bool { return all[i].Load >= r.Load })
		if i == len(all) || all[i].Load != r.Load {
			all = append(all[:i], append([]Register{{}}, all[i:]...)...)
		}
		all[i] = r
	}
	return bucket.Put(keyRegisters, appendRegisters(nil, all))
}

// Registers returns the register of every load that ever had one, by load.
func (s *Store) Registers() ([]Register, error) {
	var all []Register
	err := s.view(func(tx *bolt.Tx) (err error) {
		if all, err = parseRegisters(tx.Bucket(bucketRegisters).Get(keyRegisters)); err != nil {
			return s.damage("registers", keyRegisters, err)
		}
		return nil
	})
	return all, err
}
