package store

import (
	"encoding/binary"
	"math"

	bolt "go.etcd.io/bbolt"
)

func (r *Register) floats() [4]*float64 {
	return [4]*float64{&r.Given, &r.Taken, &r.Measured, &r.Missing}
}

func loadKey(load uint32) []byte { return binary.BigEndian.AppendUint32(nil, load) }

func registerValue(r Register) []byte {
	var b []byte
	for _, f := range r.floats() {
		b = binary.LittleEndian.AppendUint64(b, math.Float64bits(*f))
	}
	return binary.LittleEndian.AppendUint32(b, checksum(loadKey(r.Load), b))
}

func parseRegister(key, value []byte) (Register, error) {
	if len(key) != 4 || len(value) != 36 ||
		binary.LittleEndian.Uint32(value[32:]) != checksum(key, value[:32]) {
		return Register{}, errRecord
	}
	r := Register{Load: binary.BigEndian.Uint32(key)}
	for i, f := range r.floats() {
		*f = math.Float64frombits(binary.LittleEndian.Uint64(value[8*i:]))
	}
	return r, nil
}

// Registers returns the register of every load that ever had one, by load.
func (s *Store) Registers() ([]Register, error) {
	var all []Register
	err := s.view(func(tx *bolt.Tx) error {
		return tx.Bucket(bucketRegisters).ForEach(func(k, v []byte) error {
			r, err := parseRegister(k, v)
			if err != nil {
				return s.damage("register", k, err)
			}
			all = append(all, r)
			return nil
		})
	})
	return all, err
}
