package bench

import (
	"os"
	"os/exec"
	"path/filepath"
	"testing"
)

// BenchmarkBinary builds the stripped binary for arm/v7 and tells its size.
func BenchmarkBinary(b *testing.B) {
	dir := b.TempDir()
	for b.Loop() {
		if out, err := exec.Command("../build", dir, "armv7").CombinedOutput(); err != nil {
			b.Fatalf("%v\n%s", err, out)
		}
	}
	info, err := os.Stat(filepath.Join(dir, "heatreeve-linux-armv7"))
	if err != nil {
		b.Fatal(err)
	}
	b.ReportMetric(float64(info.Size())/(1<<20), "MiB")
}
