package site

import "testing"

func BenchmarkParse(b *testing.B) {
	text := []byte(plant)
	b.ReportAllocs()
	for b.Loop() {
		if _, err := Parse("plant.yaml", text); err != nil {
			b.Fatal(err)
		}
	}
}
