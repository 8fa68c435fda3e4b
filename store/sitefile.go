package store

import (
	"crypto/sha256"
	"encoding/binary"
)

// SiteFile is the text of a site file, and since when (event time, Unix nanoseconds) the
// accounts go by it. Digest is the SHA-256 of Text.
type SiteFile struct {
	From   int64
	Digest [32]byte
	Text   []byte
}

// mostSiteText bounds a text, as package agent/site does.
const mostSiteText = 16 << 20

func siteKey(from int64) []byte { return binary.BigEndian.AppendUint64(nil, uint64(from)^1<<63) }

// isSiteTime tells the key of a beginning from that of a text.
func isSiteTime(key []byte) bool { return len(key) == 8 }

// summed puts the checksum behind a value.
func summed(key, value []byte) []byte {
	return binary.LittleEndian.AppendUint32(value, checksum(key, value))
}

// unsummed takes it off, and reports whether it is that of key and value.
func unsummed(key, value []byte) (rest []byte, ok bool) {
	n := len(value) - 4
	if n < 0 || binary.LittleEndian.Uint32(value[n:]) != checksum(key, value[:n]) {
		return nil, false
	}
	return value[:n], true
}

// parseSiteTime reads since when which text is in force.
func parseSiteTime(key, value []byte) (f SiteFile, err error) {
	digest, ok := unsummed(key, value)
	if !ok || len(key) != 8 || len(digest) != sha256.Size {
		return f, errRecord
	}
	return SiteFile{From: keyTime(key), Digest: [32]byte(digest)}, nil
}

// appendText packs a text, whose key is its digest.
func appendText(key, text []byte) ([]byte, error) {
	packed, err := deflated(text)
	if err != nil {
		return nil, err
	}
	return summed(key, packed), nil
}

// parseText unpacks the text under its digest.
func parseText(key, value []byte) ([]byte, error) {
	packed, ok := unsummed(key, value)
	if !ok {
		return nil, errRecord
	}
	text, err := inflated(packed)
	if sum := sha256.Sum256(text); err != nil || string(sum[:]) != string(key) {
		return nil, errRecord
	}
	return text, nil
}
