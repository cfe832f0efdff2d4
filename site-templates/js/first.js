/* The first page's list: found by text, area and state, walked by keyboard, all of it kept in the address. */
(function () {
  "use strict";
  const KEYS = ["find", "area", "state"];
  const table = document.querySelector("table.all");
  if (!table) return;
  const inputs = KEYS.map((key) => document.getElementById(key));
  const shown = document.getElementById("shown");
  const rows = Array.from(table.querySelectorAll("tr[data-row]"));
  const headings = Array.from(table.querySelectorAll("tr.area"));

  /** What is asked for, by key; an empty text asks for nothing. */
  function asked() {
    return Object.fromEntries(KEYS.map((key, i) => [key, inputs[i] ? inputs[i].value.trim() : ""]));
  }

  function fits(row, want, words) {
    return (!want.area || row.dataset.area === want.area) && (!want.state || row.dataset.state === want.state)
      && words.every((word) => row.dataset.text.includes(word));
  }

  function filter() {
    const want = asked();
    const words = want.find.toLowerCase().split(/\s+/).filter(Boolean);
    const areas = new Set();
    let count = 0;
    rows.forEach((row) => {
      const fit = fits(row, want, words);
      row.hidden = !fit;
      if (fit) { count += 1; areas.add(row.dataset.area); }
    });
    headings.forEach((heading) => { heading.hidden = !areas.has(heading.dataset.area); });
    if (shown) {
      shown.textContent = count === rows.length ? "all " + rows.length : count ? count + " of " + rows.length : "none of " + rows.length;
    }
  }

  /** Write what is asked for into the address, beside whatever else stands there. */
  function remember() {
    const hash = new URLSearchParams(location.hash.slice(1));
    Object.entries(asked()).forEach(([key, value]) => { if (value) hash.set(key, value); else hash.delete(key); });
    const address = hash.size ? "#" + hash : location.pathname + location.search;
    try { history.replaceState(null, "", address); } catch { if (hash.size) location.replace("#" + hash); }
  }

  function recall() {
    const hash = new URLSearchParams(location.hash.slice(1));
    KEYS.forEach((key, i) => {
      if (!inputs[i]) return;
      inputs[i].value = hash.get(key) || "";
      if (inputs[i].selectedIndex === -1) inputs[i].value = ""; // an area or state that is no more
    });
    filter();
  }

  /** Move to the next or the previous row in sight; its link takes the focus, so that Enter opens it. */
  function walk(step) {
    const links = rows.filter((row) => !row.hidden).map((row) => row.querySelector("a[href]")).filter(Boolean);
    if (!links.length) return;
    const row = document.activeElement && document.activeElement.closest("tr[data-row]");
    const here = row ? links.findIndex((link) => row.contains(link)) : -1;
    const next = here < 0 ? (step > 0 ? 0 : links.length - 1) : Math.min(Math.max(here + step, 0), links.length - 1);
    links[next].focus();
    links[next].closest("tr").scrollIntoView({ block: "nearest" });
  }

  function typing(element) {
    return element.closest && element.closest("input, select, textarea, [contenteditable]");
  }

  document.addEventListener("keydown", (event) => {
    if (event.ctrlKey || event.metaKey || event.altKey || event.defaultPrevented) return;
    const find = inputs[0];
    if (typing(event.target)) {
      if (event.target !== find) return;
      if (event.key === "Escape") { find.value = ""; filter(); remember(); find.blur(); }
      if (event.key === "Enter") { event.preventDefault(); walk(1); }
      return;
    }
    if (event.key === "/" && find) { event.preventDefault(); find.focus(); find.select(); }
    if (event.key === "j") { event.preventDefault(); walk(1); }
    if (event.key === "k") { event.preventDefault(); walk(-1); }
  });
  inputs.filter(Boolean).forEach((input) => input.addEventListener("input", () => { filter(); remember(); }));
  addEventListener("hashchange", recall);
  recall();
})();
