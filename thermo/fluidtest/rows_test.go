package fluidtest

import (
	"fmt"
	"math"
	"strings"
	"testing"
	"testing/fstest"
)

// refusal is a test that keeps what it was ended with.
type refusal struct {
	testing.TB
	said string
}

func (*refusal) Helper() {}

func (r *refusal) Fatal(args ...any) { r.Fatalf("%s", fmt.Sprint(args...)) }

func (r *refusal) Fatalf(format string, args ...any) {
	r.said = fmt.Sprintf(format, args...)
	panic(r)
}

// ending is what do ends its test with; nothing where it does not.
func ending(do func(t testing.TB)) string {
	r := new(refusal)
	func() {
		defer func() {
			if end := recover(); end != nil && end != any(r) {
				panic(end)
			}
		}()
		do(r)
	}()
	return r.said
}

func tables(text string) fstest.MapFS {
	return fstest.MapFS{"gases.csv": {Data: []byte(text)}}
}

func TestRows(t *testing.T) {
	rows := Rows(t, tables("# a source\ngas,T_K,cp,note\n# hot ones\n\"N2, dry\",300,1.04e3,\nO2,,918,from memory\n"), "gases.csv")
	if len(rows) != 2 {
		t.Fatalf("%d rows, want 2", len(rows))
	}
	a, b := rows[0], rows[1]
	if a.Text("gas") != "N2, dry" || a.Number("T_K") != 300 || a.Number("cp") != 1040 || a.Printed("cp") != 1040 || a.Text("note") != "" {
		t.Error(a)
	}
	if a.Has("note") || !b.Has("note") || b.Has("T_K") || !math.IsNaN(b.Printed("T_K")) {
		t.Error(a, b)
	}
	if !strings.HasPrefix(b.String(), "gases.csv, row 2") {
		t.Errorf("%q does not name its row", b)
	}
}

func TestRowsRefuses(t *testing.T) {
	number := func(column string) func(Row) { return func(r Row) { r.Number(column) } }
	for _, tt := range []struct {
		fault, text string
		ask         func(Row)
		want        string
	}{
		{"a missing column", "T\n300\n", number("cp"), `gases.csv, row 1: no column "cp"`},
		{"a missing column of text", "T\n300\n", func(r Row) { r.Text("gas") }, `no column "gas"`},
		{"a missing column that may be empty", "T\n300\n", func(r Row) { r.Has("gas") }, `no column "gas"`},
		{"a missing column that is printed somewhere", "T\n300\n", func(r Row) { r.Printed("gas") }, `no column "gas"`},
		{"a bad number", "T,cp\n300,1.o4\n", number("cp"), `row 1: "1.o4" in column "cp" is no figure`},
		{"a bad number that may be missing", "T,cp\n300,-\n", func(r Row) { r.Printed("cp") }, `"-" in column "cp"`},
		{"an empty number", "T,cp\n300,\n", number("cp"), `"" in column "cp"`},
		{"NaN", "T,cp\n300,NaN\n", number("cp"), `"NaN" in column "cp"`},
		{"an infinity", "T,cp\n300,-Inf\n", number("cp"), `"-Inf" in column "cp"`},
		{"no rows", "# a source\nT,cp\n# 300,1040\n", nil, "gases.csv: no rows"},
		{"an empty file", "", nil, "gases.csv: no rows"},
		{"a short row", "T,cp\n300\n", nil, "gases.csv: record on line 2: wrong number of fields"},
		{"a column twice", "T,cp,T\n300,1040,301\n", nil, "gases.csv: a column of the same name twice"},
	} {
		said := ending(func(t testing.TB) {
			for _, r := range Rows(t, tables(tt.text), "gases.csv") {
				tt.ask(r)
			}
		})
		if !strings.Contains(said, tt.want) {
			t.Errorf("%s: ended with %q, want %q", tt.fault, said, tt.want)
		}
	}
	if said := ending(func(t testing.TB) { Rows(t, fstest.MapFS{}, "gases.csv") }); !strings.Contains(said, "gases.csv") {
		t.Errorf("a missing table: ended with %q", said)
	}
}
