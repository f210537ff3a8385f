"use strict";
(() => {
  const table = document.getElementById("table");
  const body = table.tBodies[0];
  const count = document.getElementById("count");
  const more = document.getElementById("more");
  const find = document.getElementById("find");
  const state = document.getElementById("state");
  const failing = document.getElementById("failing");
  const data = JSON.parse(document.getElementById("data").textContent);
  const columns = data.columns;
  const total = data.regimes.length;
  const STEP = 200; // rows that are drawn at once: a long list stays quick
  const PAPER = 3000; // rows that are drawn for a print
  const all = Array.from({ length: total }, (_, row) => row);
  const searched = columns.filter((c) => ["Tag", "Case", "Service"].includes(c.heading));
  const texts = all.map((row) => searched.map((c) => c.cells[row]).join("\n").toLowerCase());
  const compare = new Intl.Collator("en", { numeric: true, sensitivity: "base" }).compare;
  const sorted = { column: -1, down: false, rows: all };
  let rows = all;
  let drawn = STEP;

  // --- sorting: numbers as numbers, missing ones last both ways, equals in the order of the list ---

  function keysOf(column) {
    if (column.sort === "rank") return data.regimes.map((r) => (r < data.order.length - 1 ? r : null));
    if (column.sort === "number") return column.cells.map((t) => (t === "" ? null : Number(t)));
    return column.cells.map((t) => (t === "" ? null : t));
  }

  function ordered(column, down) {
    const keys = keysOf(column);
    const known = all.filter((row) => keys[row] !== null);
    const missing = all.filter((row) => keys[row] === null);
    const text = column.sort === "text";
    const sign = down ? -1 : 1;
    known.sort((a, b) => sign * (text ? compare(keys[a], keys[b]) : keys[a] - keys[b]) || a - b);
    return known.concat(missing);
  }

  function sortBy(number) {
    if (sorted.column !== number) Object.assign(sorted, { column: number, down: false });
    else if (!sorted.down) sorted.down = true;
    else sorted.column = -1;
    sorted.rows = sorted.column < 0 ? all : ordered(columns[number], sorted.down);
    heads.forEach((head, n) => {
      if (n === sorted.column) head.setAttribute("aria-sort", sorted.down ? "descending" : "ascending");
      else head.removeAttribute("aria-sort");
    });
    update();
  }

  // --- filtering ---

  function update() {
    const words = find.value.toLowerCase().split(/\s+/).filter(Boolean);
    const wanted = state.value === "" ? -1 : Number(state.value);
    const only = failing.checked;
    rows = sorted.rows.filter((row) =>
      (wanted < 0 || data.regimes[row] === wanted) && (!only || data.fails[row] === 1) &&
      words.every((word) => texts[row].includes(word)));
    drawn = STEP;
    draw();
  }

  // --- drawing: text only, never markup ---

  function rowOf(row) {
    const line = document.createElement("tr");
    if (data.fails[row]) line.className = "fails";
    columns.forEach((column, n) => {
      const cell = document.createElement(n === 0 ? "th" : "td");
      if (n > 0 && column.look) cell.className = column.look;
      if (n === 0) {
        cell.scope = "row";
        if (column.cells[row].length <= 18) cell.className = "tag";
        if (data.sections[row]) {
          const link = document.createElement("a");
          link.href = "#item-" + data.sections[row];
          link.textContent = column.cells[row];
          cell.append(link);
          line.append(cell);
          return;
        }
      }
      cell.textContent = column.cells[row];
      line.append(cell);
    });
    return line;
  }

  function draw() {
    const there = rows.slice(0, drawn);
    const lines = document.createDocumentFragment();
    there.forEach((row) => lines.append(rowOf(row)));
    body.replaceChildren(lines);
    tell(there.length);
  }

  function tell(there) {
    const cases = (n) => n + (n === 1 ? " case" : " cases");
    let text = rows.length === total ? cases(total) : rows.length + " of " + cases(total);
    if (there < rows.length) text += ", the first " + there + " are shown";
    count.textContent = rows.length ? text + "." : "No case of " + total + " fits.";
    more.hidden = there >= rows.length;
  }

  function drawMore() {
    const next = rows.slice(drawn, drawn + STEP);
    drawn += STEP;
    const lines = document.createDocumentFragment();
    next.forEach((row) => lines.append(rowOf(row)));
    body.append(lines);
    tell(Math.min(drawn, rows.length));
  }

  // --- heads become buttons ---

  const heads = Array.from(table.tHead.rows[0].cells);
  heads.forEach((head, n) => {
    const button = document.createElement("button");
    button.type = "button";
    button.textContent = head.textContent;
    button.addEventListener("click", () => sortBy(n));
    head.replaceChildren(button);
  });

  // --- paper: every row that fits, every working open ---

  let closed = [];
  window.addEventListener("beforeprint", () => {
    closed = Array.from(document.querySelectorAll("details:not([open])"));
    closed.forEach((d) => { d.open = true; });
    drawn = Math.max(drawn, PAPER);
    draw();
  });
  window.addEventListener("afterprint", () => {
    closed.forEach((d) => { d.open = false; });
    drawn = STEP;
    draw();
  });

  document.getElementById("controls").addEventListener("submit", (event) => event.preventDefault());
  document.getElementById("controls").hidden = false;
  find.addEventListener("input", update);
  state.addEventListener("change", update);
  failing.addEventListener("change", update);
  more.addEventListener("click", drawMore);
  update();
})();
