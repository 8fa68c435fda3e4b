package store

import (
	"bytes"
	"compress/flate"
	"errors"
	"io"
)

// deflated packs a text (RFC 1951).
func deflated(text []byte) ([]byte, error) {
	var b bytes.Buffer
	w, err := flate.NewWriter(&b, flate.BestCompression)
	if err != nil {
		return nil, err
	}
	if _, err := w.Write(text); err != nil {
		return nil, err
	}
	if err := w.Close(); err != nil {
		return nil, err
	}
	return b.Bytes(), nil
}

// inflated unpacks what deflated has packed; what is longer than any text is an error.
func inflated(packed []byte) ([]byte, error) {
	text, err := io.ReadAll(io.LimitReader(flate.NewReader(bytes.NewReader(packed)), mostSiteText+1))
	if err == nil && len(text) > mostSiteText {
		err = errors.New("text is too long")
	}
	return text, err
}
