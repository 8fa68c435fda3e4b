package ingest_test

import (
	"fmt"
	"time"

	"heatreeve/ingest"
)

func ExampleDecoder() {
	tags := []ingest.Tag{
		{Name: "HW-TT-1", Topic: "creamery/hw", Value: "/supply", Time: "/ts", Scale: 1, Offset: 273.15, Min: 223.15, Max: 523.15},
		{Name: "HW-TT-2", Topic: "creamery/hw", Value: "/return", Time: "/ts", Scale: 1, Offset: 273.15, Min: 223.15, Max: 523.15},
	}
	d, err := ingest.NewDecoder(tags, ingest.DefaultAhead)
	if err != nil {
		fmt.Println(err)
		return
	}
	arrival := time.Date(2026, 3, 2, 6, 0, 1, 0, time.UTC).UnixNano()
	payload := []byte(`{"ts":"2026-03-02T06:00:00Z","supply":82.5,"return":"n/a"}`)
	out, _ := d.Decode("creamery/hw", payload, arrival, false, nil)
	for _, o := range out {
		if o.Refusal != nil {
			fmt.Println(o.Refusal.Reason, "-", o.Refusal)
			continue
		}
		fmt.Println(tags[o.Tag].Name, o.Value, "K at", time.Unix(0, o.At).UTC().Format(time.TimeOnly))
	}
	// Output:
	// HW-TT-1 355.65 K at 06:00:00
	// wrong-type - tag "HW-TT-2": payload "{\"ts\":\"2026-03-02T06:00:00Z\",\"supply\":82.5,\"return\":\"n/a\"}" has text at "/return" where a number should be; publish a number without quotes
}
