/* Brings the charts of a page to life: each figure keeps its static picture unless everything succeeds. */
(function () {
  "use strict";
  const holdsteady = window.holdsteady || (window.holdsteady = {});
  const rows = holdsteady.rows, reading = holdsteady.reading;
  const COLOURS = ["paper", "ink", "soft", "faint", "hair", "band", "open", "said", "data"];
  const PAPER_WIDTH = 680; // pixels of an upright A4 page between its margins
  const CHOICES = [["60", "last"], ["limits", "since"], ["all", "all"]];
  const waiting = new Map(), charts = [];
  const kinds = new Promise((resolve) => { holdsteady.kinds = resolve; });

  holdsteady.data = function (id, columns) {
    const resolve = waiting.get(id);
    if (resolve) resolve(columns);
  };

  /** Load a page's columns by a script tag; nothing else is allowed from `file://`. */
  function load(id, source) {
    return new Promise((resolve, reject) => {
      waiting.set(id, resolve);
      const script = document.createElement("script");
      script.src = source;
      script.onerror = () => reject(new Error("cannot load " + source));
      script.onload = () => { script.remove(); reject(new Error("no data of " + id + " in " + source)); };
      document.head.append(script);
    });
  }

  const context = document.createElement("canvas").getContext("2d");
  context.font = '12px system-ui, "Segoe UI", sans-serif';
  const measured = new Map();
  function measure(text) {
    if (!measured.has(text)) measured.set(text, context.measureText(text).width);
    return measured.get(text);
  }

  /** The reader's colours, or on paper the specification's own on white. */
  function colours(chart) {
    if (chart.onPaper) return Object.assign({}, chart.defaults, { c_paper: "#ffffff" });
    const style = getComputedStyle(chart.figure);
    const found = {};
    COLOURS.forEach((name) => {
      found["c_" + name] = style.getPropertyValue("--" + name).trim() || chart.defaults["c_" + name];
    });
    return found;
  }

  /** Work out everything at the present width and hand it to the view. */
  function draw(chart) {
    const data = chart.data, view = chart.view;
    const total = chart.onPaper ? PAPER_WIDTH : chart.box.clientWidth;
    if (!total || !data.count) return;
    chart.total = total;
    chart.win = rows.stretch(data, chart.choice);
    const frame = holdsteady.frame(data, chart.win, total, measure);
    chart.frame = frame;
    const signals = Object.assign({}, frame.signals, colours(chart));
    view.padding(frame.padding).width(signals.width).height(signals.height);
    Object.keys(signals).forEach((name) => {
      if (name !== "width" && name !== "height") view.signal(name, signals[name]);
    });
    data.panels.forEach((panel, k) => {
      const domain = frame.panels[k].domain;
      const steps = rows.steps(data, k, chart.win, domain, frame.pixel);
      view.data(panel.name + "_points", rows.points(data, k, chart.win, signals.width, domain));
      view.data(panel.name + "_bands", steps.bands);
      view.data(panel.name + "_edges", steps.edges);
      view.data(panel.name + "_centres", steps.centres);
      view.data(panel.name + "_starts", rows.starts(data, k, chart.win, frame.pixel));
    });
    ["words", "spans", "ticks", "brackets"].forEach((name) => view.data(name, frame[name]));
    view.data("reading", []).run();
  }

  /** The stretch in the address, else the figure's own wish, else everything. */
  function chosen(figure) {
    const asked = new URLSearchParams(location.hash.slice(1)).get("show") || figure.dataset.show;
    return CHOICES.some((choice) => choice[0] === asked) ? asked : "all";
  }

  function remember(choice) {
    const hash = new URLSearchParams(location.hash.slice(1));
    hash.set("show", choice);
    try { history.replaceState(null, "", "#" + hash); } catch { location.replace("#" + hash); }
  }

  /** Buttons for the stretches that differ from everything; none where there is nothing to choose. */
  function buttons(chart) {
    const size = (choice) => rows.stretch(chart.data, choice).from;
    const offered = CHOICES.filter((choice) => choice[0] === "all" || size(choice[0]) > 0);
    const group = document.createElement("div");
    group.className = "chart-choice";
    group.setAttribute("role", "group");
    group.setAttribute("aria-label", chart.data.words.show);
    if (offered.length > 1) {
      group.append(...offered.map((choice) => {
        const button = document.createElement("button");
        button.type = "button";
        button.textContent = chart.data.words[choice[1]];
        button.dataset.choice = choice[0];
        button.addEventListener("click", () => { remember(choice[0]); choose(chart, choice[0]); });
        return button;
      }));
    }
    return group;
  }

  function choose(chart, choice) {
    chart.choice = choice;
    chart.group.querySelectorAll("button").forEach((button) => {
      button.setAttribute("aria-pressed", String(button.dataset.choice === choice));
    });
    chart.leave();
    draw(chart);
  }

  /** Make the view in a box of its own, and only then let it take the static picture's place. */
  function build(figure, data, compiled) {
    const name = data.kind + (data.timed ? "" : "/untimed");
    const spec = compiled.vega[compiled.kinds[name]];
    if (!spec) throw new Error("no chart of kind " + name);
    const defaults = {};
    spec.signals.forEach((signal) => { if (signal.name.startsWith("c_")) defaults[signal.name] = signal.value; });
    const box = document.createElement("div"), host = document.createElement("div"), note = document.createElement("div");
    box.className = "chart-live"; host.className = "chart-view"; note.className = "chart-note";
    box.tabIndex = 0;
    box.setAttribute("role", "group");
    box.setAttribute("aria-roledescription", "chart");
    const named = figure.getAttribute("aria-labelledby");
    if (named) box.setAttribute("aria-labelledby", named);
    else box.setAttribute("aria-label", data.panels.map((panel) => panel.title).join("; "));
    const caption = figure.querySelector("figcaption");
    if (caption) {
      if (!caption.id) caption.id = "about-" + figure.dataset.id;
      box.setAttribute("aria-describedby", caption.id);
    }
    box.setAttribute("aria-description", data.words.hint);
    note.hidden = true;
    box.append(host, note);
    const chart = { figure: figure, data: data, box: box, note: note, defaults: defaults, choice: chosen(figure), onPaper: false, leave: () => {} };
    chart.group = buttons(chart);
    const fallback = figure.querySelector("svg");
    figure.insertBefore(box, fallback || figure.firstChild);
    figure.insertBefore(chart.group, box);
    try {
      chart.view = new vega.View(vega.parse(spec, null, { ast: true }), {
        expr: vega.expressionInterpreter, renderer: "svg", container: host, hover: false, tooltip: () => {},
      });
      chart.mark = (i) => {
        const at = i < 0 ? [] : [{ x: rows.at(data, i), top: chart.frame.panels[0].top }];
        chart.view.data("reading", at).run();
      };
      choose(chart, chart.choice);
      chart.leave = reading.attach(chart);
    } catch (error) {
      box.remove(); chart.group.remove();
      throw error;
    }
    if (fallback) fallback.remove();
    figure.dataset.state = "live";
    charts.push(chart);
    new ResizeObserver(() => { if (box.clientWidth !== chart.total && !chart.onPaper) { chart.leave(); draw(chart); } }).observe(box);
  }

  async function bring(figure) {
    try {
      const data = await load(figure.dataset.id, figure.dataset.src);
      build(figure, data, await kinds);
    } catch (error) {
      figure.dataset.state = "static";
      console.error("chart " + figure.dataset.id + ": " + error.message);
    }
  }

  function paper(onPaper) {
    charts.forEach((chart) => { chart.leave(); chart.onPaper = onPaper; draw(chart); });
  }

  function start() {
    document.querySelectorAll("figure.chart[data-src]").forEach(bring);
    matchMedia("(prefers-color-scheme: dark)").addEventListener("change", () => charts.forEach(draw));
    addEventListener("beforeprint", () => paper(true));
    addEventListener("afterprint", () => paper(false));
    addEventListener("hashchange", () => charts.forEach((chart) => choose(chart, chosen(chart.figure))));
  }

  if (document.readyState === "loading") addEventListener("DOMContentLoaded", start); else start();
})();
