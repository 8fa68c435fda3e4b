package answer

import (
	"heatreeve/agent/warn"
	"time"
)

// Standing is what a plant's agent warns of now.
type Standing struct {
	Site     string          `json:"site"`
	At       time.Time       `json:"at"` // event time up to which all is accounted for
	Warnings []warn.Document `json:"warnings"`
	Shelves  []Shelved       `json:"shelves"`
}

// Shelved is a shelf, whether or not there is a warning on it.
type Shelved struct {
	Subject string `json:"subject"`
	Kind    string `json:"kind"`
	warn.MarkDocument
}
