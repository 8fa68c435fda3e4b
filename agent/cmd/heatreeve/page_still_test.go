//go:build services

package main

import (
	"fmt"
	"testing"

	"github.com/chromedp/cdproto/emulation"
	"github.com/chromedp/chromedp"
)

// stillThere is what the sheet of loads has without script, once all its loads are measured.
var stillThere = map[string]string{
	"bands":     `[...document.querySelectorAll("[data-load]")].length === 4`,
	"duties":    `[...document.querySelectorAll("[data-load] .duty")].every(d => /\d/.test(d.textContent))`,
	"verdicts":  `[...document.querySelectorAll("[data-load] .verdict")].every(d => d.textContent !== "")`,
	"lenses":    `[...document.querySelectorAll("[data-load] .lens")].every(d => d.getBoundingClientRect().width > 0)`,
	"no stream": `performance.getEntriesByType("resource").every(e => !e.name.includes("stream") && !e.name.endsWith("/ribbons"))`,
}

// still reads the sheet of loads and the account where no script runs.
func (b *browser) still(t *testing.T, a *agentUnderTest) {
	x := b.tab(t, a.address)
	devtools(x, emulation.SetScriptExecutionDisabled, emulation.SetScriptExecutionDisabledParams{Value: true})
	x.size(360, 800)
	eventually(t, "without script the sheet is whole", func() error {
		x.open("/")
		for what, expression := range stillThere {
			if !eval[bool](x, expression) {
				return fmt.Errorf("%s: not so: %s", what, expression)
			}
		}
		return nil
	})
	eval[any](x, `document.querySelector("[data-load='milk']").scrollIntoView()`)
	x.until("the ribbon comes as an image", `[...document.querySelectorAll("[data-load='milk'] img.ribbon")].some(i => i.complete && i.naturalWidth > 0)`)
	x.do(chromedp.SendKeys(chromedp.CSS("input[name=find]"), "milk"), chromedp.Click(chromedp.CSS("#filter button")))
	x.until("the filter leaves one band", `document.querySelectorAll("[data-load]:not([hidden])").length === 1`)

	x.open("/account")
	if rows := eval[int](x, `document.querySelectorAll("main table tbody tr").length`); rows < 4 {
		t.Errorf("without script the account has %d rows", rows)
	}
	if w := eval[int](x, widest); w > 360 {
		t.Errorf("without script the account is %d px wide in a window of 360", w)
	}
}
