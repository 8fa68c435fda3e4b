//go:build services

package main

import (
	"html"
	"math"
	"os/exec"
	"path/filepath"
	"regexp"
	"strconv"
	"strings"
	"testing"

	"github.com/chromedp/cdproto/emulation"
	"github.com/chromedp/chromedp"
)

// print has the account printed on A4 and Letter, and Debian's pdftotext read it: each word that
// a printed page has is there, whole and within its sheet.
func (b *browser) print(t *testing.T, a *agentUnderTest) {
	x := b.tab(t, a.address)
	x.open("/account")
	devtools(x, emulation.SetEmulatedMedia, emulation.SetEmulatedMediaParams{Media: "print"})
	wanted := parts(eval[string](x, "document.body.innerText"))
	if len(wanted) < 50 {
		t.Fatalf("the account to be printed has %d words", len(wanted))
	}
	dir := shots(t)
	for name, paper := range map[string]chromedp.PaperSize{"a4": chromedp.PaperA4, "letter": chromedp.PaperLetter} {
		sheet, err := chromedp.Run(x.ctx, chromedp.PrintToPDF(chromedp.PDFPaper(paper)))
		if err != nil {
			t.Fatal(err)
		}
		write(t, dir, "account-"+name+".pdf", sheet)
		words := wordsOf(t, filepath.Join(dir, "account-"+name+".pdf"), paper)
		for _, word := range wanted {
			if words[word]--; words[word] < 0 {
				t.Errorf("%s: %q is missing", name, word)
			}
		}
	}
}

var (
	sheetBox = regexp.MustCompile(`<page width="([\d.]+)" height="([\d.]+)">`)
	wordBox  = regexp.MustCompile(`<word xMin="([-\d.]+)" yMin="([-\d.]+)" xMax="([-\d.]+)" yMax="([-\d.]+)">(.*)</word>`)
)

// parts are the words of a text, which a line may break after a hyphen too.
func parts(text string) []string { return strings.Fields(strings.ReplaceAll(text, "-", "- ")) }

// wordsOf counts the words of a PDF, and holds them to the paper, of which a point is 1/72 inch.
func wordsOf(t *testing.T, path string, paper chromedp.PaperSize) map[string]int {
	t.Helper()
	out, err := exec.Command(program(t, "pdftotext", "poppler-utils"), "-bbox", path, "-").Output()
	if err != nil {
		t.Fatal(err)
	}
	number := func(s string) float64 { v, _ := strconv.ParseFloat(s, 64); return v }
	sheets := sheetBox.FindAllStringSubmatch(string(out), -1)
	width, height := 72*paper.Width, 72*paper.Height
	for _, s := range sheets {
		if math.Abs(number(s[1])-width) > 1 || math.Abs(number(s[2])-height) > 1 {
			t.Errorf("%s: a sheet of %s by %s pt, want %.0f by %.0f", path, s[1], s[2], width, height)
		}
	}
	words := make(map[string]int)
	for _, w := range wordBox.FindAllStringSubmatch(string(out), -1) {
		for _, part := range parts(html.UnescapeString(w[5])) {
			words[part]++
		}
		if number(w[1]) < 0 || number(w[2]) < 0 || number(w[3]) > width || number(w[4]) > height {
			t.Errorf("%s: %q lies beyond the sheet, at %v", path, w[5], w[1:5])
		}
	}
	t.Logf("%s: %d sheets", path, len(sheets))
	return words
}
