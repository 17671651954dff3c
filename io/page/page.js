// What the page can do beyond being read: sort, search, filter, tell, change its light. Nothing is fetched
// and nothing kept.
"use strict";
(() => {
  const table = document.getElementById("ranked");
  const sizes = {kV: 1e3, V: 1, mV: 1e-3, uV: 1e-6, Gohm: 1e9, Mohm: 1e6, kohm: 1e3, ohm: 1, mohm: 1e-3,
    kA: 1e3, A: 1, mA: 1e-3, uA: 1e-6, nA: 1e-9};

  // "63 V", "<0.01 V", "12 to 33 V" by the last figure with its unit; what is no figure sorts last.
  function amount(text) {
    const found = [...text.matchAll(/([\d.]+)\s*([A-Za-z]+)?/g)].filter(one => !one[2] || one[2] in sizes || one[2] === "to");
    if (!found.length) return Infinity;
    const last = found[found.length - 1];
    return Number(last[1]) * (sizes[last[2]] ?? 1) - (text.startsWith("<") ? 1e-12 : 0);
  }

  function compare(a, b, figures) {
    if (!figures) return a.localeCompare(b, "en", {numeric: true});
    const x = amount(a), y = amount(b);
    return x === y ? 0 : x < y ? -1 : 1;
  }

  function sortBy(column) {
    const head = table.tHead.rows[0].cells[column];
    const down = head.getAttribute("aria-sort") === "ascending";
    for (const cell of table.tHead.rows[0].cells) cell.removeAttribute("aria-sort");
    head.setAttribute("aria-sort", down ? "descending" : "ascending");
    const figures = head.classList.contains("n");
    const body = table.tBodies[0];
    const rows = [...body.rows].map(row => [row.cells[column].textContent, row]);
    rows.sort((a, b) => (down ? -1 : 1) * compare(a[0], b[0], figures));
    body.append(...rows.map(one => one[1]));
  }

  function addSorting() {
    [...table.tHead.rows[0].cells].forEach((cell, column) => {
      const button = document.createElement("button");
      button.type = "button";
      button.textContent = cell.textContent;
      button.addEventListener("click", () => sortBy(column));
      cell.replaceChildren(button);
    });
  }

  function addFilters() {
    const form = document.getElementById("find");
    const count = document.getElementById("count");
    const heads = [...table.tHead.rows[0].cells];
    const columns = {};
    for (const key of ["panel", "condition", "verdict"]) {
      columns[key] = heads.findIndex(cell => cell.dataset.f === key);
      const values = new Set([...table.tBodies[0].rows].map(row => row.cells[columns[key]].textContent));
      for (const value of [...values].sort()) form.elements[key].add(new Option(value || "none", "=" + value));
    }
    const apply = () => {
      const words = form.elements.q.value.toLowerCase().split(/\s+/).filter(Boolean);
      const place = form.elements.place.value;
      let shown = 0;
      for (const row of table.tBodies[0].rows) {
        const text = row.textContent.toLowerCase();
        const fits = words.every(word => text.includes(word)) &&
          (place === "" || row.dataset.p.includes(` ${place} `)) &&
          Object.keys(columns).every(key => {
            const wanted = form.elements[key].value;
            return wanted === "" || "=" + row.cells[columns[key]].textContent === wanted;
          });
        row.hidden = !fits;
        shown += fits ? 1 : 0;
      }
      count.textContent = `${shown} of ${table.tBodies[0].rows.length} shown`;
    };
    form.hidden = false;
    form.addEventListener("input", apply);
    form.addEventListener("submit", event => event.preventDefault());
    form.addEventListener("reset", () => setTimeout(apply));
    apply();
  }

  function addTheme() {
    const button = document.createElement("button");
    const root = document.documentElement;
    let dark = matchMedia("(prefers-color-scheme: dark)").matches;
    const show = () => { button.textContent = dark ? "Light page" : "Dark page"; };
    button.type = "button";
    button.id = "theme";
    button.addEventListener("click", () => {
      dark = !dark;
      root.dataset.theme = dark ? "dark" : "light";
      show();
    });
    show();
    document.querySelector("nav").append(button);
  }

  function addTelling() {
    const told = document.getElementById("told");
    const plan = document.querySelector("#plan svg");
    if (!told || !plan) return;
    const tell = event => {
      const link = event.target.closest("a");
      if (link) told.textContent = link.getAttribute("aria-label");
    };
    plan.addEventListener("mouseover", tell);
    plan.addEventListener("focusin", tell);
  }

  addTheme();
  addTelling();
  if (table) {
    addSorting();
    addFilters();
  }
})();
