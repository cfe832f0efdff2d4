/* Where everything stands at a given width: margins, lanes above and below, and the words in them. */
(function () {
  "use strict";
  const holdsteady = window.holdsteady || (window.holdsteady = {});
  const rows = holdsteady.rows;
  const LEFT = 2, ROW = 19, LINE = 15;

  /** Cut a text to a width in pixels; nothing where fewer than `least` letters would be left. */
  function fit(text, room, measure, least = 4) {
    if (measure(text) <= room) return text;
    let low = 0, high = text.length;
    while (low < high) {
      const middle = (low + high + 1) >> 1;
      if (measure(text.slice(0, middle).trimEnd() + "…") <= room) low = middle; else high = middle - 1;
    }
    return low < least ? "" : text.slice(0, low).trimEnd() + "…";
  }

  /** Rows of a lane, filled from the top; `place` finds the first row in which [a, b] is free. */
  function lane(most) {
    const taken = [];
    return {
      free(row, a, b) { return !(taken[row] || []).some((t) => a < t[1] + 10 && b > t[0] - 10); },
      take(row, a, b) { (taken[row] || (taken[row] = [])).push([a, b]); },
      place(a, b) {
        for (let row = 0; row < most; row += 1) if (this.free(row, a, b)) { this.take(row, a, b); return row; }
        return -1;
      },
      get size() { return taken.length; },
    };
  }

  /** The words beside the last limits in sight, moved apart where they would touch. */
  function limitWords(data, panel, win, y, place) {
    const source = data.panels[panel];
    const inSight = data.limits.filter((row) => row.panel === panel && row.from < win.to && row.to > win.from);
    const row = inSight[inSight.length - 1];
    const said = [];
    if (row) {
      const here = rows.limitsAt(data, row, Math.min(row.to, win.to) - 1);
      ["upper", "centre", "lower"].forEach((name) => {
        if (here[name] !== null && row.said[name] !== null) said.push({ value: here[name], text: row.said[name] });
      });
    }
    if (!row || !row.drawn) {
      const values = source.value.slice(win.from, win.to).filter((v) => v !== null);
      if (values.length) {
        [Math.max(...values), Math.min(...values)].forEach((v) => {
          const text = holdsteady.reading.number(source, v);
          if (!said.some((s) => s.text === text)) said.push({ value: v, text: text });
        });
      }
    }
    const near = (s) => y.bottom - y.at(s.value) < 13;
    if (y.domain.low === 0 && source.floor !== false && !said.some(near)) said.push({ value: 0, text: source.floor });
    const placed = said.map((s) => ({ y: y.at(s.value), text: s.text })).sort((a, b) => a.y - b.y);
    for (let i = 1; i < placed.length; i += 1) placed[i].y = Math.max(placed[i].y, placed[i - 1].y + 14);
    const over = placed.length ? placed[placed.length - 1].y - (y.bottom + 4) : 0;
    if (over > 0) {
      for (let i = placed.length - 1, most = y.bottom + 4; i >= 0; i -= 1, most -= 14) placed[i].y = Math.min(placed[i].y, most);
    }
    return placed.map((p) => ({ left: place, y: p.y, text: p.text, anchor: "left", tone: "soft" }));
  }

  /** The eras' lane: a line each, and above it the words for its limits. */
  function eraLane(data, win, x, room, measure, out) {
    const shown = data.eras.filter((e) => e.from < win.to && e.to > win.from && (e.text || data.eras.length > 1));
    const places = shown.map((e) => Math.max(0, x(rows.between(data, Math.max(e.from, win.from)))));
    let edge = room;
    for (let k = shown.length - 1; k >= 0; k -= 1) {
      const wide = measure(shown[k].text);
      const back = k === shown.length - 1 ? Math.max(Math.min(places[k], edge - wide), k ? places[k] - 140 : 0) : places[k];
      const left = Math.max(0, back);
      const text = fit(shown[k].text, edge - left, measure, 9);
      if (text) { out.words.push({ left: left, y: 8, text: text, anchor: "left", tone: "soft" }); edge = left - 12; }
      const ends = [Math.max(shown[k].from, win.from), Math.min(shown[k].to, win.to)];
      const gap = out.pixel * 3;
      out.spans.push({
        x: rows.between(data, ends[0]) + (shown[k].from > win.from ? gap : 0),
        x2: rows.between(data, ends[1]) - (shown[k].to < win.to ? gap : 0), y: 20, tone: "faint", width: 1,
      });
    }
    return shown.length ? 28 : 0;
  }

  /** The lane of what people wrote, and of the stretches that limits are estimated from. */
  function entryLane(data, win, x, width, room, measure, top, out) {
    const packed = lane(4), wordless = []; // what finds no room for its words shares a last row
    const mark = (item, wide, y) => {
      const said = item.tone === "said", thick = said ? 2 : 1;
      if (wide > 2) out.spans.push({ x: item.from, x2: item.to, y: y, tone: item.tone, width: thick });
      (said ? [item.from] : [item.from, item.to]).forEach((v) => {
        out.ticks.push({ x: v, y: y, tall: said ? 11 : 6, tone: item.tone, width: thick });
      });
    };
    const items = data.baselines.filter((b) => b.from < win.to && b.to > win.from).map((b) => ({
      from: rows.at(data, Math.max(b.from, win.from)), to: rows.at(data, Math.min(b.to, win.to) - 1), text: b.text, tone: "faint",
    })).concat(data.entries.map((e) => ({ from: e.from, to: e.to, text: e.text, tone: "said" })));
    items.filter((i) => x(i.to) >= -1 && x(i.from) <= width + 1).sort((a, b) => a.from - b.from).forEach((item) => {
      const a = Math.max(0, x(item.from)), b = Math.min(width, x(item.to));
      const text = fit(item.text, Math.min(280, Math.max(room - b - 8, a - 8)), measure);
      const wide = text ? measure(text) + 8 : 0;
      let row = b + wide <= room ? packed.place(a, b + wide) : -1;
      let right = b + wide <= room;
      if (!right || row < 0) {
        right = false;
        row = packed.place(a - wide, b);
      }
      if (row < 0) { wordless.push(item); return; }
      const y = top + row * ROW + 8;
      mark(item, b - a, y);
      if (text) {
        out.words.push({
          left: right ? b + 7 : a - 7, y: y, text: text, anchor: right ? "left" : "right", tone: item.tone === "said" ? "said" : "soft",
        });
      }
    });
    wordless.forEach((item) => mark(item, x(item.to) - x(item.from), top + packed.size * ROW + 8));
    const size = packed.size + (wordless.length ? 1 : 0);
    return size ? size * ROW + 3 : 0;
  }

  /** The cases' lane: a bar as long as each lasted, with its words beside it, or below where there is no room. */
  function caseLane(data, win, x, width, measure, top, out) {
    const packed = lane(5), wordless = [];
    const rank = { open: 0, said: 1, past: 2 };
    const shown = data.cases.filter((c) => c.from < win.to && c.to > win.from);
    shown.sort((a, b) => rank[a.tone] - rank[b.tone] || b.from - a.from).forEach((c) => {
      const from = rows.at(data, Math.max(c.from, win.from)), to = rows.at(data, Math.min(c.to, win.to) - 1);
      const a = x(from) - 3, b = Math.max(x(to), x(from) + 2) + 3;
      const wide = measure(c.text) + 10;
      let row = -1, word = null;
      if (a - wide >= 0) { row = packed.place(a - wide, b); word = { left: a - 8, anchor: "right", text: c.text }; }
      if (row < 0 && b + wide <= width) { row = packed.place(a, b + wide); word = { left: b + 8, anchor: "left", text: c.text }; }
      let below = 0;
      if (row < 0) {
        const text = fit(c.text, width, measure);
        const end = Math.min(Math.max(b, wide - 10), width), start = Math.max(0, end - measure(text));
        for (let k = 0; k < 4 && row < 0; k += 1) {
          if (packed.free(k, a, b) && packed.free(k + 1, start, end)) {
            packed.take(k, a, b); packed.take(k + 1, start, end);
            row = k; below = ROW - 3; word = { left: end, anchor: "right", text: text };
          }
        }
      }
      const past = c.tone === "past";
      const bar = { x: from, x2: to + 2 * out.pixel, tone: past ? "faint" : c.tone, width: past ? 3 : 5 };
      if (row < 0) { wordless.push(bar); return; }
      bar.y = top + row * ROW + 10;
      out.spans.push(bar);
      out.words.push(Object.assign(word, { y: bar.y + below, tone: past ? "soft" : c.tone }));
    });
    wordless.forEach((bar) => out.spans.push(Object.assign(bar, { y: top + packed.size * ROW + 10 })));
    const size = packed.size + (wordless.length ? 1 : 0);
    return size ? size * ROW + 8 : 0;
  }

  /** The bracket of what is wanted of single pieces; where it goes on beyond the plot it ends in dashes. */
  function bracket(wanted, y, left, out) {
    const inside = (v) => v !== null && v >= y.domain.low && v <= y.domain.high;
    const line = (x, x2, a, b) => out.brackets.push({ left: x, right: x2, y: a, y2: b });
    const ends = [[wanted.upper, y.top, 1], [wanted.lower, y.bottom, -1]].map(([v, edge, way]) => {
      if (inside(v)) { line(left, left + 6, y.at(v), y.at(v)); return y.at(v); }
      if (v === null) return edge;
      [0, 6].forEach((d) => line(left + 6, left + 6, edge + way * d, edge + way * (d + 3)));
      return edge + way * 12;
    });
    line(left + 6, left + 6, ends[0], ends[1]);
    return (ends[0] + ends[1]) / 2;
  }

  /** The widths of the right margin: of its numbers, of what is wanted, and of both together. */
  function margin(data, narrow, measure) {
    const widest = (texts) => Math.ceil(Math.max(0, ...texts.map(measure)));
    const texts = data.limits.flatMap((row) => Object.values(row.said)).filter((text) => text !== null);
    data.panels.forEach((panel) => {
      if (panel.floor !== false) texts.push(panel.floor);
      const value = panel.value.find((v) => v !== null);
      if (value !== undefined && data.limits.every((row) => !row.drawn)) texts.push(holdsteady.reading.number(panel, value));
    });
    const numbers = widest(texts);
    const wanted = !data.wanted ? 0 : narrow ? 14 : 32 + widest(data.wanted.lines);
    return { numbers: numbers, right: 12 + numbers + wanted };
  }

  /** The horizontal domain: the stretch, and a little room for the outermost points. */
  function across(data, win, width) {
    const first = rows.at(data, win.from), last = rows.at(data, win.to - 1);
    const span = last - first || (data.timed ? 86400000 : 1);
    const pad = last > first ? (span * 7) / (width - 14) : span / 2;
    const from = first - pad, to = last + pad;
    return { from: from, to: to, pixel: (to - from) / width, x: (v) => ((v - from) / (to - from)) * width };
  }

  /** A panel's title; at narrow widths what is wanted stands beside it, or below where it would touch. */
  function title(panel, said, top, total, right, measure, out) {
    out.words.push({ left: 0, y: top + 8, text: fit(panel.title, total - 4, measure), anchor: "left", tone: "ink" });
    if (!said) return top + 22;
    if (measure(panel.title) + measure(said) + 24 > total) top += LINE;
    out.words.push({ left: right - 2, y: top + 8, text: fit(said, total - 4, measure), anchor: "right", tone: "soft" });
    return top + 22;
  }

  /** The vertical scale of panel k, whose plot begins at `top`. */
  function upright(data, k, win, top, narrow) {
    const single = data.panels.length === 1;
    const tall = single ? (narrow ? 210 : 260) : k === 0 ? (narrow ? 190 : 220) : narrow ? 90 : 105;
    const domain = rows.heights(data, k, win);
    const inside = (v) => Math.min(Math.max(v, domain.low), domain.high);
    return {
      top: top, bottom: top + tall, domain: domain,
      at: (v) => top + tall - ((inside(v) - domain.low) / (domain.high - domain.low)) * tall,
    };
  }

  /** The words of what is wanted, beside the middle of its bracket. */
  function wantedWords(lines, left, middle, out) {
    lines.forEach((text, i) => out.words.push({
      left: left, y: middle + (i - (lines.length - 1) / 2) * LINE, text: text, anchor: "left", tone: "soft",
    }));
  }

  /** Everything a view needs at this width: signals, padding, rows of lanes, words and brackets. */
  function frame(data, win, total, measure) {
    const narrow = total < 640;
    const { numbers, right } = margin(data, narrow, measure);
    const width = Math.max(total - LEFT - right, 120);
    const { from, to, pixel, x } = across(data, win, width);
    const out = { words: [], spans: [], ticks: [], brackets: [], pixel: pixel };
    let top = eraLane(data, win, x, width + right, measure, out);
    top += entryLane(data, win, x, width, width + right, measure, top, out);
    const radius = Math.min(2.1, Math.max(0.9, (width / Math.max(win.to - win.from, 1)) * 0.45));
    const ticks = Math.max(2, Math.floor(width / (narrow ? 75 : 110)));
    const signals = { width: width, x_from: from, x_to: to, ticks: ticks, dot: Math.PI * radius * radius };
    const panels = data.panels.map((panel, k) => {
      const wanted = data.wanted && data.wanted.panel === k ? data.wanted : null;
      top = title(panel, wanted && narrow ? wanted.lines.join(" ") : "", top + (k ? 6 : 4), total, width + right, measure, out);
      const y = upright(data, k, win, top, narrow);
      out.words.push(...limitWords(data, k, win, y, width + 10));
      if (wanted) {
        const left = width + 10 + numbers + (narrow ? 6 : 14);
        const middle = bracket(wanted, y, left, out);
        if (!narrow) wantedWords(wanted.lines, left + 14, middle, out);
      }
      signals[panel.name + "_top"] = y.top; signals[panel.name + "_bottom"] = y.bottom;
      signals[panel.name + "_low"] = y.domain.low; signals[panel.name + "_high"] = y.domain.high;
      top = y.bottom;
      if (k === 0) top += caseLane(data, win, x, width, measure, top + 6, out) + 6;
      return y;
    });
    signals.height = top + 4;
    signals.plot_bottom = panels[panels.length - 1].bottom;
    const bottom = data.moments ? 26 + ROW : 26; // below the order that stands for the times
    if (data.moments) out.words.push({ left: 0, y: signals.height + 33, text: data.words.order, anchor: "left", tone: "soft" });
    return Object.assign(out, { signals: signals, panels: panels, x: x, padding: { left: LEFT, right: right, top: 6, bottom: bottom } });
  }

  holdsteady.frame = frame;
})();
