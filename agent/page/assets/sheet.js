// The live sheet: puts what the agent's event stream says in its place. All figures come as
// text; the only sums here are those of places on a duty line.
"use strict";
(() => {
  const root = document.documentElement;
  const list = document.querySelector(".bands[data-stream]");
  if (!list) return;
  const bands = new Map(); // by the number of the load
  for (const el of list.querySelectorAll(".band")) bands.set(+el.dataset.i, parts(el));

  function parts(el) {
    const q = (s) => el.querySelector(s);
    const [a, b] = el.querySelectorAll(".bracket");
    const line = q(".line");
    return {
      el, line, a, b, low: +line.dataset.low, high: +line.dataset.high,
      duty: q(".duty"), pm: q(".pm"), verdict: q(".verdict"), use: q(".mark use"), note: q(".note"),
      lens: q(".lens"), notch: q(".notch"), unit: q(".unit").textContent,
      fields: [q(".duty").textContent, q(".pm").textContent.replace(" ± ", ""), "", ""],
    };
  }

  const inSight = new Set(); // bands
  const has = (text) => text !== "" && text !== "–";

  // say puts the figures of a band into words, in sight or not: who listens or searches is
  // to find those of now.
  function say(x) {
    const [duty, pm, expected, allowed] = x.fields;
    x.duty.textContent = duty;
    x.pm.textContent = has(pm) ? " ± " + pm : "";
    x.line.setAttribute("aria-label", !has(duty) ? "no duty" : duty + (has(pm) ? " ± " + pm : "") + " " + x.unit + (has(expected) ? `, expected ${expected}, allowed ± ${allowed}` : ""));
    if (inSight.has(x.el)) draw(x); else x.stale = true; // until it comes in sight
  }

  // draw puts them on the duty line: duty, ±, expected, allowance.
  function draw(x) {
    const [duty, pm, expected, allowed] = x.fields;
    x.stale = false;
    const at = (v) => (100 * Math.min(1, Math.max(0, (v - x.low) / (x.high - x.low)))).toFixed(2) + "%";
    x.lens.toggleAttribute("hidden", !has(duty));
    if (has(duty)) {
      x.lens.setAttribute("cx", at(+duty));
      x.lens.setAttribute("rx", (100 * Math.min(1, +pm / (x.high - x.low))).toFixed(2) + "%");
      x.beyond = +duty < x.low || +duty > x.high;
      if (x.beyond) rescale();
    }
    for (const part of [x.notch, x.a, x.b]) part.toggleAttribute("hidden", !has(expected));
    if (has(expected)) {
      x.notch.setAttribute("x", at(+expected));
      x.a.setAttribute("x", at(+expected - +allowed));
      x.b.setAttribute("x", at(+expected + +allowed));
    }
  }
  addEventListener("beforeprint", () => { for (const x of bands.values()) if (x.stale) draw(x); });

  // figures reads the data of a nameless event.
  function figures(data) {
    const [at, all] = data.split("|");
    let i = 0;
    if (all !== "") for (const record of all.split(",")) {
      if (record[0] === "*") { i += +record.slice(1); continue; }
      const x = bands.get(i++);
      if (!x || record === "") continue;
      record.split(" ").forEach((text, k) => { if (text !== "") x.fields[k] = text === "-" ? (k === 0 ? "–" : "") : text; });
      say(x);
    }
    return +at;
  }

  function words(all) {
    for (const [i, verdict, note] of all) {
      const x = bands.get(i);
      if (!x) continue;
      x.el.dataset.verdict = verdict;
      x.verdict.textContent = verdict;
      x.use.setAttribute("href", "#" + verdict);
      x.note.textContent = note;
    }
    if (all.length > 0) tally(all);
  }

  // verdicts counts by verdict, also loads that are not on the sheet.
  const verdicts = new Map();
  const form = document.getElementById("filter"); // which the sheet of one load has not
  const boxes = [...document.querySelectorAll("#filter input[name=verdict]")];
  function tally(all) {
    for (const [i, verdict] of all) verdicts.set(i, verdict);
    const count = {};
    for (const v of verdicts.values()) count[v] = (count[v] || 0) + 1;
    for (const box of boxes) box.parentElement.querySelector("b").textContent = count[box.value] || 0;
    filter();
  }

  // warned asks for the list of warnings again where it is another than that of the page.
  const standing = document.getElementById("standing"); // which the sheet of one load has not
  async function warned(which) {
    if (!standing || standing.dataset.warned === which) return;
    standing.dataset.warned = which;
    await new Promise((go) => setTimeout(go, 2000 * Math.random())); // not all pages at once
    const fresh = (await anew())?.getElementById("standing");
    if (!fresh) { standing.dataset.warned = ""; return; } // asked again when the link is back
    if (standing.querySelector("details[open]")) fresh.querySelector("details")?.setAttribute("open", "");
    standing.replaceChildren(...fresh.childNodes);
  }

  // anew is this page as the agent would give it now, null where it does not.
  async function anew() {
    const answer = await fetch(location.href).catch(() => null);
    return answer && answer.ok ? new DOMParser().parseFromString(await answer.text(), "text/html") : null;
  }

  // rescale puts the duty line of another scale in the place of one that a figure has left.
  let scaled = 0;
  async function rescale() {
    if (Date.now() - scaled < 10000) return;
    scaled = Date.now();
    const page = await anew();
    if (!page) return;
    for (const [i, x] of bands) {
      const line = x.beyond && page.querySelector(`.band[data-i="${i}"] .line`);
      if (!line) continue;
      const [a, b] = line.querySelectorAll(".bracket");
      x.line.replaceWith(line);
      Object.assign(x, { line, a, b, low: +line.dataset.low, high: +line.dataset.high, lens: line.querySelector(".lens"), notch: line.querySelector(".notch"), beyond: false });
      say(x);
    }
  }

  const find = document.querySelector("#filter input[name=find]");
  const hidden = document.getElementById("hidden");
  const nothing = document.getElementById("nothing");
  function filter() {
    if (!form) return;
    const name = find.value.toLowerCase();
    const wanted = boxes.filter((b) => b.checked).map((b) => b.value);
    let out = 0;
    for (const x of bands.values()) {
      const shown = x.el.dataset.load.toLowerCase().includes(name) && (wanted.length === 0 || wanted.includes(x.el.dataset.verdict));
      if (x.el.hidden === shown) x.el.hidden = !shown;
      if (!shown) out++;
    }
    const text = out === 0 ? "" : out + (out === 1 ? " load left out" : " loads left out");
    if (hidden.textContent !== text) hidden.textContent = text;
    if (nothing) nothing.hidden = out < bands.size;
  }
  // kept has the filter in the address, so that a link to it can be sent.
  function kept() {
    const q = new URLSearchParams([...new FormData(form)].filter(([, text]) => text !== ""));
    history.replaceState(null, "", location.pathname + (q.size > 0 ? "?" + q : ""));
  }
  if (form) {
    form.addEventListener("input", () => { filter(); kept(); });
    form.querySelector("button").hidden = true; // it filters as one types
  }

  // The link to the agent.
  const at = document.getElementById("at");
  const link = document.getElementById("link");
  const quiet = 12000; // ms without an event: the stream says something at each beat
  let source, timer, seen = Date.now(), lost = false;
  function alive() {
    seen = Date.now();
    if (lost) { lost = false; delete root.dataset.link; link.textContent = ""; }
  }
  function gone(why) {
    if (lost) return;
    lost = true;
    root.dataset.link = "lost";
    link.textContent = `${why} since ${new Date(seen).toLocaleTimeString("en-GB")}; figures are of then`;
  }
  function open() {
    clearTimeout(timer);
    source = new EventSource(list.dataset.stream);
    source.addEventListener("plan", (e) => { if (e.data !== root.dataset.plan) location.reload(); });
    source.addEventListener("warnings", (e) => warned(e.data));
    source.addEventListener("words", (e) => words(JSON.parse(e.data)));
    source.onmessage = (e) => {
      const t = figures(e.data);
      if (!at && t > 0) location.reload(); // the first reading has come
      if (at && t > 0) { at.textContent = wallClock(t); at.dateTime = new Date(t * 1000).toISOString(); }
      alive();
    };
    source.onerror = () => {
      gone("No word from the agent");
      if (source.readyState === EventSource.CLOSED) timer = setTimeout(open, 5000);
    };
  }
  // wallClock is an instant by the clock of the site, whose offset the page came with.
  const offset = at ? at.textContent.match(/[+-]\d\d:\d\d$/)[0] : "+00:00";
  function wallClock(t) {
    const [h, m] = offset.slice(1).split(":").map(Number);
    const local = new Date((t + (offset[0] === "-" ? -1 : 1) * (h * 3600 + m * 60)) * 1000);
    return new Intl.DateTimeFormat("en-GB", { timeZone: "UTC", weekday: "short", day: "numeric", month: "short", hour: "2-digit", minute: "2-digit", second: "2-digit" }).format(local).replace(",", "") + " " + offset;
  }
  setInterval(() => { if (Date.now() - seen > quiet) gone("No word from the agent"); }, 2000);
  open();

  // Ribbons are drawn for the bands in sight, and anew each minute.
  const drawn = new Map();
  const watch = new IntersectionObserver((entries) => {
    for (const e of entries) {
      if (!e.isIntersecting) { inSight.delete(e.target); continue; }
      inSight.add(e.target);
      const x = bands.get(+e.target.dataset.i);
      if (x.stale) draw(x);
    }
    ask();
  }, { rootMargin: "200px" });
  for (const x of bands.values()) watch.observe(x.el);
  let asking = false;
  async function ask() {
    const minute = Math.floor(Date.now() / 60000);
    const wanted = [...inSight].filter((el) => drawn.get(el) !== minute && !el.hidden).slice(0, 50);
    if (asking || wanted.length === 0) return;
    asking = true;
    let more = false;
    try {
      const q = new URLSearchParams(wanted.map((el) => ["load", el.dataset.load]));
      const answer = await fetch("/ribbons?" + q);
      if (answer.ok) {
        put(await answer.json(), wanted, minute);
        more = wanted.length === 50;
      }
    } catch { /* the link is lost, which is told already */ }
    asking = false;
    if (more) ask();
  }
  function put(all, wanted, minute) {
    for (const el of wanted) {
      drawn.set(el, minute);
      const x = all[el.dataset.load];
      if (!x) continue;
      const svg = el.querySelector("svg.ribbon");
      for (const k of ["base", "given", "taken", "bridged"]) svg.querySelector("." + k).setAttribute("d", x[k]);
      svg.setAttribute("aria-label", x.said);
    }
  }
  setInterval(ask, 10000);
})();
