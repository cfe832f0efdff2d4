/* Reading single points: how numbers and moments are written, and the note beside the point being read. */
(function () {
  "use strict";
  const holdsteady = window.holdsteady || (window.holdsteady = {});
  const rows = holdsteady.rows;
  const DAYS = ["Sun", "Mon", "Tue", "Wed", "Thu", "Fri", "Sat"];
  const MONTHS = ["Jan", "Feb", "Mar", "Apr", "May", "Jun", "Jul", "Aug", "Sep", "Oct", "Nov", "Dec"];

  /** A value as its panel writes it, without unit: true minus, thousands in threes from five digits on. */
  function number(panel, value) {
    const scaled = value * panel.factor;
    let text;
    if (panel.decimals !== null) {
      text = scaled.toFixed(panel.decimals);
      if (Number(text) === 0 && scaled !== 0) text = Number(scaled.toPrecision(1)).toString();
    }
    else if (Number.isInteger(scaled) && Math.abs(scaled) < 1e9) text = String(scaled);
    else {
      const size = scaled === 0 ? 0 : Math.floor(Math.log10(Math.abs(scaled)));
      text = size <= -6 || size > 8 ? scaled.toExponential(3) : scaled.toFixed(Math.max(3 - size, 0));
    }
    if (Number(text) === 0) text = text.replace("-", "");
    const parts = text.split(".");
    if (/^-?\d{5,}$/.test(parts[0])) parts[0] = parts[0].replace(/\B(?=(\d{3})+$)/g, "\u202f");
    return parts.join(".").replace("-", "−");
  }

  /** A moment of the plant's wall clock: 'Tue 17 Mar 2026, 14:10'. */
  function moment(milliseconds) {
    const d = new Date(milliseconds);
    const two = (v) => String(v).padStart(2, "0");
    const seconds = d.getUTCSeconds() ? ":" + two(d.getUTCSeconds()) : "";
    const day = DAYS[d.getUTCDay()] + " " + d.getUTCDate() + " " + MONTHS[d.getUTCMonth()] + " " + d.getUTCFullYear();
    return day + ", " + two(d.getUTCHours()) + ":" + two(d.getUTCMinutes()) + seconds;
  }

  /** The limits of a panel at a point, in words. */
  function limitsSaid(data, panel, i) {
    const row = rows.limitsRow(data, panel, i);
    if (!row) return "";
    const words = data.words, source = data.panels[panel];
    const here = rows.limitsAt(data, row, i);
    const say = (v) => number(source, v);
    if (here.lower !== null && here.upper !== null) return words.limits + " " + say(here.lower) + " " + words.to + " " + say(here.upper);
    if (here.upper !== null) return words.upper + " " + say(here.upper);
    if (here.lower !== null) return words.lower + " " + say(here.lower);
    return here.centre !== null ? words.centre + " " + say(here.centre) : "";
  }

  /** What there is to say about point i, line by line: [text, class]. */
  function lines(data, i, frame) {
    const words = data.words;
    const name = data.label && data.label[i] ? data.label[i] : words.point + " " + (i + 1);
    const n = Array.isArray(data.n) ? data.n[i] : data.n;
    const when = data.timed ? rows.at(data, i) : data.moments ? data.moments[i] : null;
    const said = [[when === null ? name : moment(when), "when"]];
    data.panels.forEach((panel, k) => {
      const value = panel.value[i];
      if (value === null) return;
      const limits = limitsSaid(data, k, i);
      said.push([panel.title.split(",")[0] + " " + number(panel, value) + panel.unit + (limits ? " · " + limits : ""), "value"]);
    });
    const size = n === null ? "" : words.n + " = " + number({ factor: 1, decimals: null }, n);
    said.push([[when === null ? "" : name, size].filter(Boolean).join(" · "), "soft"]);
    const marks = new Set(data.panels.map((panel) => rows.marksOf(panel).get(i)));
    if (marks.has("fault")) said.push([words.faulty, "soft"]);
    const sided = (side) => marks.has(side) || marks.has("ring " + side);
    ["below", "above"].forEach((side) => { if (sided(side)) said.push([words[side], "soft"]); });
    if (marks.has("hollow") && !sided("below") && !sided("above")) said.push([words.excluded, "soft"]);
    if (marks.has("open")) said.push([words.open, "soft"]);
    const beyond = (panel, k) => panel.value[i] !== null && (panel.value[i] < frame.panels[k].domain.low || panel.value[i] > frame.panels[k].domain.high);
    if (data.panels.some(beyond)) said.push([words.beyond, "soft"]);
    if (data.panels.some((panel) => panel.baseline.some((b) => b[0] <= i && i < b[1]))) said.push([words.baseline, "soft"]);
    data.cases.filter((c) => c.from <= i && i < c.to).forEach((c) => said.push([c.text, c.tone]));
    return said.filter((line) => line[0]);
  }

  /** The point of a stretch nearest to a horizontal place. */
  function nearest(data, win, place) {
    let low = win.from, high = win.to - 1;
    while (high - low > 1) {
      const middle = (low + high) >> 1;
      if (rows.at(data, middle) < place) low = middle; else high = middle;
    }
    return Math.abs(rows.at(data, low) - place) <= Math.abs(rows.at(data, high) - place) ? low : high;
  }

  /** Fill the note and put it beside a place, inside its box. Text nodes alone: whatever it says is inert. */
  function show(note, data, i, frame, box) {
    const place = frame.padding.left + frame.x(rows.at(data, i));
    note.replaceChildren(...lines(data, i, frame).map((line) => {
      const element = document.createElement("div");
      element.className = line[1];
      element.textContent = line[0];
      return element;
    }));
    note.hidden = false;
    const wide = note.offsetWidth;
    const left = place + 14 + wide <= box ? place + 14 : Math.max(0, Math.min(place - 14 - wide, box - wide));
    note.style.left = left + "px";
  }

  /** Let a view be read by pointer and by keyboard. `chart` has data, win, frame, box, note and mark(i). */
  function attach(chart) {
    let current = -1;
    const read = (i, said) => {
      current = i;
      chart.note.setAttribute("aria-live", said ? "polite" : "off");
      chart.mark(i);
      show(chart.note, chart.data, i, chart.frame, chart.box.clientWidth);
    };
    const leave = () => {
      if (current < 0) return;
      current = -1;
      chart.note.hidden = true;
      chart.mark(-1);
    };
    const follow = (event) => {
      const signals = chart.frame.signals;
      const across = (event.clientX - chart.box.getBoundingClientRect().left - chart.frame.padding.left) / signals.width;
      if (across < -0.02 || across > 1.02) { leave(); return; }
      const i = nearest(chart.data, chart.win, signals.x_from + across * (signals.x_to - signals.x_from));
      if (i !== current) read(i, false);
    };
    chart.box.addEventListener("pointermove", follow);
    chart.box.addEventListener("pointerdown", follow);
    chart.box.addEventListener("pointerleave", leave);
    chart.box.addEventListener("blur", leave);
    chart.box.addEventListener("keydown", (event) => {
      const first = chart.win.from, last = chart.win.to - 1;
      const next = {
        ArrowLeft: current < 0 ? last : current - 1, ArrowRight: current < 0 ? first : current + 1, Home: first, End: last,
      }[event.key];
      if (event.key === "Escape") leave();
      if (next === undefined || event.ctrlKey || event.metaKey || event.altKey) return;
      event.preventDefault();
      read(Math.min(Math.max(next, first), last), true);
    });
    return leave;
  }

  holdsteady.reading = { number: number, moment: moment, lines: lines, nearest: nearest, attach: attach };
})();
