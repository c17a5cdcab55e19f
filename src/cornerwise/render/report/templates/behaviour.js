"use strict";
(() => {
  const all = (selector, root = document) => Array.from(root.querySelectorAll(selector));
  const byId = (id) => document.getElementById(id);

  // Sorting: a button in each header; empty fields stay last whichever way.
  const key = (cell) => {
    const text = cell.dataset.sort !== undefined ? cell.dataset.sort : cell.textContent.trim();
    return text !== "" && Number.isFinite(Number(text)) ? Number(text) : text;
  };
  const compare = (a, b) => {
    if (typeof a === "number" && typeof b === "number") return a - b;
    return String(a).localeCompare(String(b), "en", { numeric: true });
  };
  const sort = (table, column, descending) => {
    const body = table.tBodies[0];
    const rows = Array.from(body.rows).map((row) => ({ row, value: key(row.cells[column]) }));
    const filled = rows.filter((one) => one.value !== "");
    const empty = rows.filter((one) => one.value === "");
    filled.sort((a, b) => (descending ? compare(b.value, a.value) : compare(a.value, b.value)));
    body.append(...filled.concat(empty).map((one) => one.row));
  };
  for (const table of all("table.sortable")) {
    const headers = Array.from(table.tHead.rows[0].cells);
    headers.forEach((header, column) => {
      if (header.classList.contains("plain")) return;
      const button = document.createElement("button");
      button.type = "button";
      button.append(...header.childNodes);
      header.append(button);
      button.addEventListener("click", () => {
        const descending = header.getAttribute("aria-sort") === "ascending";
        headers.forEach((other) => other.removeAttribute("aria-sort"));
        header.setAttribute("aria-sort", descending ? "descending" : "ascending");
        sort(table, column, descending);
      });
    });
  }

  // Filtering: lines of the table and the cycles below it.
  const rows = all("#cycle-table tbody tr");
  const filters = byId("filters");
  const filter = () => {
    const name = byId("filter-name").value.trim().toLowerCase();
    const verdict = byId("filter-verdict").value;
    const shortcut = byId("filter-shortcut").value;
    const clean = byId("filter-clean").checked;
    let shown = 0;
    for (const row of rows) {
      const keep = row.cells[0].textContent.toLowerCase().includes(name)
        && (verdict === "" || row.dataset.verdict === verdict)
        && (shortcut === "" || row.dataset.shortcut === shortcut)
        && (!clean || row.dataset.doubts === "0");
      row.hidden = !keep;
      byId(row.dataset.cycle).hidden = !keep;
      shown += keep ? 1 : 0;
    }
    byId("filter-count").textContent = `${shown} of ${rows.length} shown`;
  };
  const reset = () => {
    filters.reset();
    filter();
  };
  filters.addEventListener("submit", (event) => event.preventDefault());
  filters.addEventListener("input", filter);
  byId("filter-clear").addEventListener("click", reset);
  filters.hidden = false;
  filter();

  // Cycles: a link opens its cycle, all of them open for print.
  const cycles = all("details.cycle");
  const openTarget = () => {
    const target = byId(decodeURIComponent(location.hash.slice(1)));
    if (!target || !target.matches("details.cycle")) return;
    if (target.hidden) reset();
    target.open = true;
    target.scrollIntoView();
    target.querySelector("summary").focus({ preventScroll: true });
  };
  window.addEventListener("hashchange", openTarget);
  document.addEventListener("click", (event) => {
    const link = event.target.closest('a[href^="#cycle-"]');
    if (link && link.getAttribute("href") === location.hash) openTarget();
  });
  openTarget();
  byId("cycle-controls").hidden = cycles.length === 0;
  byId("open-all").addEventListener("click", () => cycles.forEach((one) => { one.open = true; }));
  byId("close-all").addEventListener("click", () => cycles.forEach((one) => { one.open = false; }));
  let closed = [];
  window.addEventListener("beforeprint", () => {
    closed = all("details").filter((one) => !one.open);
    closed.forEach((one) => { one.open = true; });
  });
  window.addEventListener("afterprint", () => closed.forEach((one) => { one.open = false; }));
})();
