// Charts of the sheet of one load. The columns come in SI from the address in data-series; units and
// digits are those that the server wrote beside each chart. What is drawn stands as a table below.
(() => {
  "use strict";
  const box = document.getElementById("charts");
  if (!box || typeof uPlot === "undefined") return;

  const css = (name) => getComputedStyle(document.documentElement).getPropertyValue(name).trim();
  const faint = (name, share) => {
    const at = document.createElement("canvas").getContext("2d");
    at.fillStyle = css(name);
    const hex = at.fillStyle; // as #rrggbb
    return hex + Math.round(share * 255).toString(16).padStart(2, "0");
  };
  const zone = box.dataset.zone;
  const hue = box.dataset.serves === "takes" ? "--taken" : "--given";
  const allow = Number(box.dataset.allow) || 0;
  const charts = [];
  let data = null;

  // scaleOf reads what the server says of a chart's unit.
  function scaleOf(figure) {
    const d = figure.dataset;
    const factor = Number(d.factor), offset = Number(d.offset), usual = Number(d.decimals);
    return {
      unit: d.unit,
      spread: Number(d.spread) || 0,
      of: (si) => (si === null || si === undefined ? null : (si - offset) / factor),
      span: (si) => (si === null || si === undefined ? null : si / factor),
      // text has the digits that its own spread leaves, two of it, or those of the chart.
      text(x, spread) {
        if (x === null || x === undefined) return "–";
        const n = spread > 0 ? Math.min(6, 1 - Number(spread.toExponential(1).split("e")[1])) : usual;
        return n >= 0 ? x.toFixed(n).replace(/^-(0[.0]*)$/, "$1") : String(Math.round(x / 10 ** -n) * 10 ** -n);
      },
    };
  }

  const both = (a, b, f) => a.map((x, i) => (x === null || b[i] === null ? null : f(x, b[i])));

  // kinds tell the columns and lines of each chart.
  const kinds = {
    duty: {
      columns(s, c) {
        const mean = c.mean_duty_W.map(s.of), spread = c.uncertainty_W.map((u) => (u === null ? null : 2 * s.span(u)));
        const due = c.expected_W.map(s.of), slack = due.map((x) => (x === null ? null : allow * Math.abs(x)));
        return [
          c.highest_duty_W.map(s.of), c.lowest_duty_W.map(s.of),
          both(due, slack, (x, a) => x + a), both(due, slack, (x, a) => x - a),
          both(mean, spread, (x, u) => x + u), both(mean, spread, (x, u) => x - u),
          due, mean,
        ];
      },
      lines: () => [edge(), edge(), edge("--quiet", [2, 3]), edge("--quiet", [2, 3]), edge(), edge(), line("--ink", 1.25, [6, 4]), line(hue, 2)],
      bands: [
        { series: [1, 2], fill: () => faint(hue, 0.16) },
        { series: [3, 4], fill: () => faint("--quiet", 0.12) },
        { series: [5, 6], fill: () => faint(hue, 0.32) },
      ],
      told: (s, v) => "duty " + s.text(v[7], v[4] - v[7]) + (v[4] === null || v[7] === null ? "" : " ± " + s.text(v[4] - v[7], v[4] - v[7])) + " " + s.unit + (v[6] === null ? "" : ", expected " + s.text(v[6]) + " " + s.unit),
    },
    temperature: {
      columns: (s, c) => [c.inlet_K.map(s.of), c.outlet_K.map(s.of)],
      lines: () => [line("--ink", 1.75), line("--quiet", 1.75, [7, 3])],
      told: (s, v) => "inlet " + s.text(v[0]) + ", outlet " + s.text(v[1]) + " " + s.unit,
    },
    flow: {
      columns: (s, c) => [c.flow_kg_per_s.map(s.of)],
      lines: () => [line("--ink", 1.75)],
      told: (s, v) => "flow " + s.text(v[0]) + " " + s.unit,
    },
  };

  function line(colour, width, dash) {
    return { stroke: () => css(colour), width, dash, points: { show: lonely } };
  }
  function edge(colour, dash) {
    return colour ? { stroke: () => css(colour), width: 1, dash, points: { show: false } } : { width: 0, points: { show: false } };
  }
  // lonely shows points where there are few, or a line would not show them.
  function lonely(u, index) {
    const column = u.data[index];
    return column.every((x, i) => x === null || ((column[i - 1] ?? null) === null && (column[i + 1] ?? null) === null));
  }

  const clock = new Intl.DateTimeFormat("en-GB", {
    timeZone: zone, weekday: "short", day: "numeric", month: "short", year: "numeric", hour: "2-digit", minute: "2-digit", timeZoneName: "shortOffset",
  });
  const wide = () => Math.max(240, box.clientWidth);

  // upright is the range of an axis: so wide at least that what is within the uncertainty looks so.
  function upright(low, high, spread) {
    if (low === null || high === null) return [0, 1];
    const middle = (low + high) / 2, half = Math.max((high - low) * 0.55, 3 * spread, Math.abs(middle) * 1e-6, 1e-9);
    return [middle - half, middle + half];
  }

  function options(kind, height, scale) {
    const axis = { stroke: () => css("--ink"), grid: { stroke: () => css("--line"), width: 1 }, ticks: { stroke: () => css("--line"), width: 1 }, font: "12px system-ui, sans-serif" };
    return {
      width: wide(), height, tzDate: (s) => uPlot.tzDate(new Date(s * 1e3), zone), legend: { show: false },
      cursor: { sync: { key: "course" }, drag: { x: false, y: false }, y: false, points: { size: 7 } },
      scales: { x: { time: true, range: () => [Date.parse(data.from) / 1e3, Date.parse(data.to) / 1e3] }, y: { range: (u, low, high) => upright(low, high, scale.spread) } },
      axes: [{ ...axis, values: marks }, { ...axis, size: 56, values: (u, all) => all.map((x) => String(Number(x.toPrecision(8)))) }],
      series: [{}, ...kinds[kind].lines()],
      bands: kinds[kind].bands,
      hooks: { setCursor: [(u) => u.cursor.idx !== null && u.cursor.idx !== undefined && point(u.cursor.idx, u)] },
    };
  }

  // marks writes times on the 24-hour clock; the day, or the year, stands below where it changes.
  const names = ["Jan", "Feb", "Mar", "Apr", "May", "Jun", "Jul", "Aug", "Sep", "Oct", "Nov", "Dec"];
  function marks(u, all, place, room, step) {
    let before = "";
    return all.map((s) => {
      const t = uPlot.tzDate(new Date(s * 1e3), zone);
      const month = names[t.getMonth()], year = String(t.getFullYear()), day = t.getDate() + " " + month;
      const hour = String(t.getHours()).padStart(2, "0") + ":" + String(t.getMinutes()).padStart(2, "0");
      const [text, below] = step >= 300 * 86400 ? [year, ""] : step >= 27 * 86400 ? [month, year] : step >= 86400 ? [day, year] : [hour, day];
      const known = below === before;
      before = below;
      return known ? text : text + "\n" + below;
    });
  }

  // minute is the address of the sheet with the working of a point.
  function minute(index) {
    const to = new URL(box.dataset.minute, location.href);
    to.searchParams.set("at", new Date(data.start[index] * 1e3).toISOString().replace(".000Z", "Z"));
    to.hash = "working";
    return to.pathname + to.search + to.hash;
  }

  const picker = document.createElement("div");
  picker.className = "picker";
  const slider = Object.assign(document.createElement("input"), { type: "range", min: "0", step: "1", id: "point" });
  const label = Object.assign(document.createElement("label"), { textContent: "Point in time", htmlFor: "point" });
  const reading = document.createElement("output");
  reading.setAttribute("for", "point");
  const go = document.createElement("a");
  go.textContent = "its working";
  picker.append(label, slider, reading, go);

  // point tells one point of all charts, and moves their cursors there.
  function point(index, from) {
    if (!data || index >= data.start.length) return;
    slider.value = String(index);
    const told = [clock.format(new Date(data.start[index] * 1e3))];
    for (const c of charts) told.push(kinds[c.kind].told(c.scale, c.plot.data.slice(1).map((column) => column[index])));
    reading.textContent = told.join("; ");
    slider.setAttribute("aria-valuetext", reading.textContent);
    go.href = minute(index);
    if (!from) for (const c of charts) c.plot.setCursor({ left: c.plot.valToPos(data.start[index], "x"), top: 0 });
  }
  slider.addEventListener("input", () => point(Number(slider.value)));

  function draw() {
    for (const figure of box.querySelectorAll(".chart")) {
      const kind = figure.dataset.chart, scale = scaleOf(figure);
      const columns = [data.start, ...kinds[kind].columns(scale, data)];
      if (columns.slice(1).every((column) => column.every((x) => x === null))) {
        figure.hidden = true;
        continue;
      }
      figure.hidden = false;
      const known = charts.find((c) => c.kind === kind);
      if (known) {
        known.plot.setData(columns);
        continue;
      }
      const plot = new uPlot(options(kind, kind === "duty" ? 260 : 170, scale), columns, figure);
      plot.over.addEventListener("click", () => {
        if (matchMedia("(pointer: coarse)").matches) return; // a touch chooses the point; the link below leads on
        if (plot.cursor.idx !== null && plot.cursor.idx !== undefined) location.assign(minute(plot.cursor.idx));
      });
      charts.push({ kind, scale, plot });
    }
    if (charts.length === 0) return;
    slider.max = String(data.start.length - 1);
    if (!picker.isConnected) {
      box.append(picker);
      point(Math.max(0, data.mean_duty_W.findLastIndex((x) => x !== null)), charts[0].plot);
    }
  }

  // address is where the columns are; a live sheet goes on with the clock of the plant.
  function address() {
    const to = new URL(box.dataset.series, location.href);
    if (box.dataset.live === "true" && data) {
      const end = Math.floor(Date.parse(data.accounted_to) / 60e3) * 60e3;
      to.searchParams.set("from", new Date(end - Number(box.dataset.seconds) * 1e3).toISOString().replace(".000Z", "Z"));
    }
    return to;
  }

  const trouble = document.createElement("p");
  trouble.className = "fault";
  trouble.setAttribute("role", "status");

  async function load() {
    try {
      const answer = await fetch(address(), { headers: { Accept: "application/json" } });
      const body = await answer.json();
      if (!answer.ok) throw new Error(body.detail || answer.statusText);
      data = body;
      trouble.remove();
      draw();
    } catch (e) {
      trouble.textContent = "The charts have no fresh figures: " + e.message;
      box.prepend(trouble);
    }
  }

  let width = wide();
  new ResizeObserver(() => {
    if (width === wide()) return;
    width = wide();
    for (const c of charts) c.plot.setSize({ width, height: c.plot.height });
  }).observe(box);
  matchMedia("(prefers-color-scheme: dark)").addEventListener("change", () => charts.forEach((c) => c.plot.redraw(false, true)));
  if (box.dataset.live === "true") setInterval(() => document.hidden || load(), 60e3);
  load();
})();
