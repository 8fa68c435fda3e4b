//go:build services

package main

import (
	"encoding/csv"
	"encoding/json"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
	"time"
)

// parquetScript prints the rows of a Parquet file, a line of JSON each: instants as the text of
// their nanoseconds, doubles as the text of the shortest number that is theirs.
const parquetScript = `
import {parquetReadObjects, asyncBufferFromFile} from 'hyparquet'
import {gunzipSync} from 'node:zlib'
const parsers = {timestampFromNanoseconds: n => 'ns' + n}
const rows = await parquetReadObjects({file: await asyncBufferFromFile(process.argv[2]), parsers, compressors: {GZIP: b => gunzipSync(b)}})
for (const row of rows) console.log(JSON.stringify(Object.entries(row).map(([name, x]) => [name, x === null || x === undefined ? '' : String(x)])))
`

// TestParquetByAnotherReader has the ARMv7 build write Parquet under emulation, and the npm
// package hyparquet 1.31.5 read it: the same names and figures, in the same order, as the csv.
func TestParquetByAnotherReader(t *testing.T) {
	emulator := program(t, "qemu-arm-static", "qemu-user-static")
	arm, err := build("arm", "7")
	if err != nil {
		t.Fatal(err)
	}
	defer os.RemoveAll(filepath.Dir(arm))
	dir, data := t.TempDir(), keep(t)
	install := exec.Command("npm", "install", "--prefix", dir, "--no-audit", "--no-fund", "hyparquet@1.31.5")
	if out, err := install.CombinedOutput(); err != nil {
		t.Fatalf("npm (Debian's packages npm and nodejs) cannot install hyparquet: %v\n%s", err, out)
	}
	script := filepath.Join(dir, "read.mjs")
	if err := os.WriteFile(script, []byte(parquetScript), 0o600); err != nil {
		t.Fatal(err)
	}
	for _, of := range [][]string{{"--tag", "TT-201"}, {"--load", "hot-water"}} {
		file, err := os.Create(filepath.Join(dir, "export.parquet"))
		if err != nil {
			t.Fatal(err)
		}
		write := exec.Command(emulator, append([]string{arm, "export", "--data", data, "--format", "parquet"}, of...)...)
		var said strings.Builder
		write.Stdout, write.Stderr = file, &said
		if err := write.Run(); err != nil || file.Close() != nil {
			t.Fatalf("%v: %v, %s", of, err, &said)
		}
		node := exec.Command("node", script, file.Name())
		node.Stderr = &said
		read, err := node.Output()
		if err != nil {
			t.Fatalf("%v: node (Debian's package nodejs) cannot read the file: %v, %s", of, err, &said)
		}
		_, text, _ := export(append([]string{"--data", data}, of...)...)
		sameRows(t, strings.Split(strings.TrimSpace(string(read)), "\n"), text)
	}
}

func sameRows(t *testing.T, read []string, text string) {
	t.Helper()
	want, err := csv.NewReader(strings.NewReader(text)).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	if len(read) != len(want)-1 || len(read) < 1000 {
		t.Fatalf("%d rows, the csv has %d", len(read), len(want)-1)
	}
	for i, line := range read {
		var fields [][2]string
		if err := json.Unmarshal([]byte(line), &fields); err != nil || len(fields) != len(want[0]) {
			t.Fatalf("%s: %v", line, err)
		}
		for k, f := range fields {
			if f[0] != want[0][k] || !sameField(f[1], want[i+1][k]) {
				t.Fatalf("row %d: %q is %q, the csv has %q of %q", i, f[0], f[1], want[i+1][k], want[0][k])
			}
		}
	}
}

func sameField(got, want string) bool {
	if ns, ok := strings.CutPrefix(got, "ns"); ok {
		at, err := time.Parse(time.RFC3339, want)
		return err == nil && ns == strconv.FormatInt(at.UnixNano(), 10)
	}
	x, err := strconv.ParseFloat(got, 64)
	y, err2 := strconv.ParseFloat(want, 64)
	if err != nil || err2 != nil {
		return got == want
	}
	return math.Float64bits(x) == math.Float64bits(y)
}
