/* From a page's columns to the rows of a chart's named data sets. No page, no view: numbers in, rows out. */
(function () {
  "use strict";
  const holdsteady = window.holdsteady || (window.holdsteady = {});
  const MARKS = ["point", "ring", "hollow", "fault", "open", "below", "above", "ring below", "ring above"];
  const ROUND = "M-.7,0A.7,.7,0,1,1,.7,0A.7,.7,0,1,1,-.7,0";
  const BARS = { below: "M-1,0L1,0M0,0L0,1.5", above: "M-1,0L1,0M0,0L0,-1.5" }; // the stem points to where the reading lies
  const ALL_DRAWN = 2000; // points; above, each two pixels keep four
  const DAY = 86400000;

  /** The horizontal place of point i. */
  function at(data, i) {
    return Array.isArray(data.x) ? data.x[i] : data.x.from + data.x.step * i;
  }

  /** The place between point i - 1 and point i; beyond the ends, half a step outside. */
  function between(data, i) {
    const last = data.count - 1;
    const step = (k) => (last < 1 ? (data.timed ? DAY : 1) : at(data, k + 1) - at(data, k));
    if (i <= 0) return at(data, 0) - step(0) / 2;
    if (i > last) return at(data, last) + step(Math.max(last - 1, 0)) / 2;
    return (at(data, i - 1) + at(data, i)) / 2;
  }

  /** The points a reader chose to look at, [from, to). */
  function stretch(data, choice) {
    if (choice === "60") return { from: Math.max(0, data.count - 60), to: data.count };
    if (choice === "limits") {
      const rows = data.limits.filter((row) => row.panel === 0);
      const from = rows.length ? rows[rows.length - 1].from : 0;
      return { from: from, to: data.count };
    }
    return { from: 0, to: data.count };
  }

  /** How each point of a panel is drawn, as names by index; what is not listed is an ordinary point. */
  function marksOf(panel) {
    const names = new Map();
    panel.flagged.forEach((index, k) => names.set(index, MARKS[panel.marks[k]]));
    return names;
  }

  /** Centre, lower and upper of point i under a row of limits; null where there is none. */
  function limitsAt(data, row, i) {
    if (!row.varies) return row;
    const columns = data.panels[row.panel].columns;
    return { centre: columns.centre[i], lower: columns.lower[i], upper: columns.upper[i] };
  }

  /** The row of limits of a panel that holds at point i. */
  function limitsRow(data, panel, i) {
    return data.limits.find((row) => row.panel === panel && row.from <= i && i < row.to);
  }

  /** The vertical domain of a panel over a stretch, and the specification when it is near enough to show. */
  function heights(data, panel, win) {
    const source = data.panels[panel];
    const names = marksOf(source);
    let low = Infinity, high = -Infinity;
    const take = (v) => {
      if (v !== null && v !== undefined) { low = Math.min(low, v); high = Math.max(high, v); }
    };
    let limited = false;
    data.limits.forEach((row) => {
      if (row.panel !== panel || row.to <= win.from || row.from >= win.to) return;
      const stop = row.varies ? Math.min(row.to, win.to) : Math.max(row.from, win.from) + 1;
      for (let i = Math.max(row.from, win.from); i < stop; i += 1) {
        const here = limitsAt(data, row, i);
        take(here.centre); take(here.lower); take(here.upper);
        limited = limited || (here.upper !== null && here.lower !== null) || here.upper !== null;
      }
    });
    const reach = limited ? 3 * (high - low) : Infinity;
    const floor = low - reach, ceiling = high + reach;
    for (let i = win.from; i < win.to; i += 1) {
      const v = source.value[i];
      if (v !== null && names.get(i) !== "fault" && (!limited || (v >= floor && v <= ceiling))) take(v);
    }
    if (low > high) {
      source.value.slice(win.from, win.to).forEach(take);
      if (low > high) { low = 0; high = 1; }
    }
    const grounded = source.floor !== false && low >= 0 && (source.name === "spread" || low < 0.6 * high);
    if (grounded) low = 0;
    // Rounding noise must not fill the plot: at least four steps of the last decimal.
    const least = source.decimals === null ? 0 : 4 * Math.pow(10, -source.decimals) / source.factor;
    if (high - low < least && !grounded) { const middle = (low + high) / 2; low = middle - least / 2; high = middle + least / 2; }
    let span = high - low || Math.abs(high) * 0.02 || 1;
    const wanted = data.wanted;
    if (wanted && wanted.panel === panel) {
      [wanted.lower, wanted.upper].forEach((v) => {
        if (v !== null && v > low - 0.4 * span && v < high + 0.4 * span) take(v);
      });
      span = high - low || span;
    }
    return { low: grounded && low === 0 ? 0 : low - span * 0.07, high: high + span * 0.07 };
  }

  /** Which points of a stretch are drawn: all, or first, last, lowest, highest of each two pixels and all flagged. */
  function drawn(data, panel, win, width) {
    const value = data.panels[panel].value;
    const kept = [];
    if (win.to - win.from <= ALL_DRAWN) {
      for (let i = win.from; i < win.to; i += 1) if (value[i] !== null) kept.push(i);
      return kept;
    }
    const keep = new Set(data.panels[panel].flagged.filter((i) => i >= win.from && i < win.to && value[i] !== null));
    const from = at(data, win.from);
    const each = (at(data, win.to - 1) - from) / Math.max(width / 2, 1) || 1;
    let bucket = -1, low = -1, high = -1, last = -1;
    const close = () => { if (last >= 0) { keep.add(low); keep.add(high); keep.add(last); } };
    for (let i = win.from; i < win.to; i += 1) {
      if (value[i] === null) continue;
      const here = Math.floor((at(data, i) - from) / each);
      if (here !== bucket) { close(); keep.add(i); bucket = here; low = i; high = i; }
      if (value[i] < value[low]) low = i;
      if (value[i] > value[high]) high = i;
      last = i;
    }
    close();
    return Array.from(keep).sort((a, b) => a - b);
  }

  /** Rows of `<panel>_points`. A value beyond the domain is drawn at its edge, pointing outwards. */
  function points(data, panel, win, width, domain) {
    const source = data.panels[panel];
    const names = marksOf(source);
    let piece = 0, broken = 0, seen = win.from - 1;
    const starts = data.pieces;
    return drawn(data, panel, win, width).map((i) => {
      while (piece + 1 < starts.length && starts[piece + 1] <= i) piece += 1;
      for (let k = seen + 1; k < i; k += 1) if (source.value[k] === null) { broken += 1; break; }
      seen = i;
      const v = source.value[i];
      const name = names.get(i) || "point";
      const ring = name.startsWith("ring"), side = name.split(" ").pop();
      const mark = BARS[side] ? "limit" : name;
      const over = v > domain.high, under = v < domain.low;
      return {
        x: at(data, i), y: over ? domain.high : under ? domain.low : v, piece: piece + "-" + broken,
        mark: (over || under) && mark !== "fault" ? "beyond" : mark, ring: ring,
        shape: over ? "triangle-up" : under ? "triangle-down" : BARS[side] ? BARS[side] + (ring ? ROUND : "") : "circle",
      };
    });
  }

  /** Rows of bands, their edges and centre lines of a panel, stepped half-way between points. */
  function steps(data, panel, win, domain, pixel) {
    const bands = [], edges = [], centres = [];
    const outside = 6 * pixel;
    const edge = (i, row) => {
      const inset = i > 0 && i < data.count && (i === row.from || i === row.to) ? pixel : 0;
      const x = between(data, i);
      if (i === row.from) return Math.max(x, at(data, i) - outside) + inset;
      return i === row.to ? Math.min(x, at(data, i - 1) + outside) - inset : x;
    };
    let id = 0;
    data.limits.forEach((row, k) => {
      const from = Math.max(row.from, win.from), to = Math.min(row.to, win.to);
      if (row.panel !== panel || from >= to) return;
      for (let i = from; i < to;) {
        const here = limitsAt(data, row, i);
        let stop = row.varies ? i + 1 : to;
        while (row.varies && stop < to) {
          const next = limitsAt(data, row, stop);
          if (next.lower !== here.lower || next.upper !== here.upper || next.centre !== here.centre) break;
          stop += 1;
        }
        const ends = [edge(i, row), edge(stop, row)];
        const none = here.lower === null && here.upper === null;
        if (none) id += 1;
        ends.forEach((x) => {
          if (here.centre !== null) centres.push({ x: x, y: here.centre, line: k + "-" + id });
          if (none) return;
          const lower = here.lower === null ? domain.low : here.lower;
          const upper = here.upper === null ? domain.high : here.upper;
          bands.push({ x: x, lower: lower, upper: upper, band: k + "-" + id });
          if (here.lower !== null) edges.push({ x: x, y: lower, edge: "l" + k + "-" + id, dotted: row.dotted });
          if (here.upper !== null) edges.push({ x: x, y: upper, edge: "u" + k + "-" + id, dotted: row.dotted });
        });
        i = stop;
      }
    });
    return { bands: bands, edges: edges, centres: centres };
  }

  /** Rows of `<panel>_starts`: where open cases of this panel likely began, not reaching into a pause. */
  function starts(data, panel, win, pixel) {
    const near = 6 * pixel;
    return data.cases
      .filter((c) => c.tone === "open" && c.panel === panel && c.low !== null && c.high !== null && c.high >= win.from)
      .map((c) => {
        const low = Math.max(c.low, win.from);
        return {
          x: Math.max(between(data, low), at(data, low) - near),
          x2: Math.min(between(data, c.high + 1), at(data, c.high) + near),
        };
      });
  }

  holdsteady.rows = {
    at: at, between: between, stretch: stretch, marksOf: marksOf, limitsAt: limitsAt, limitsRow: limitsRow,
    heights: heights, points: points, steps: steps, starts: starts,
  };
})();
