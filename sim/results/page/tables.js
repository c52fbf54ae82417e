// Tables that can be sorted by a column and searched.
import {element} from "./figures.js";

function sortKey(cell) {
  const number = cell.dataset.v ?? cell.textContent.trim();
  const value = Number(number);
  return number !== "" && Number.isFinite(value) ? value : cell.textContent.trim().toLowerCase();
}

// Numbers before texts, missing values last either way.
function compared(a, b, way) {
  const missing = (key) => key === "-" || key === "";
  if (missing(a) || missing(b)) return missing(a) - missing(b);
  if (typeof a !== typeof b) return typeof a === "number" ? -1 : 1;
  return way * (typeof a === "number" ? a - b : a.localeCompare(b, "en"));
}

function makeSortable(table) {
  const heads = [...table.tHead.rows[0].cells];
  heads.forEach((head, column) => {
    const button = element("button", {type: "button", class: "sort", title: "Sort by this column"});
    button.append(...head.childNodes);
    head.append(button);
    button.addEventListener("click", () => {
      const up = head.getAttribute("aria-sort") !== "ascending";
      heads.forEach((other) => other.removeAttribute("aria-sort"));
      head.setAttribute("aria-sort", up ? "ascending" : "descending");
      const body = table.tBodies[0];
      const rows = [...body.rows].map((row) => ({row, key: sortKey(row.cells[column])}));
      rows.sort((a, b) => compared(a.key, b.key, up ? 1 : -1));
      body.append(...rows.map(({row}) => row));
    });
  });
}

function makeSearchable(table) {
  const box = element("input", {type: "search", placeholder: "part of a row"});
  const count = element("span", {class: "count", role: "status"});
  const rows = [...table.tBodies[0].rows];
  box.addEventListener("input", () => {
    const wanted = box.value.trim().toLowerCase();
    let found = 0;
    for (const row of rows) {
      row.hidden = wanted !== "" && !row.textContent.toLowerCase().includes(wanted);
      found += row.hidden ? 0 : 1;
    }
    count.textContent = wanted === "" ? "" : `${found} of ${rows.length} rows`;
  });
  table.closest(".scroll").before(element("p", {class: "search"}, element("label", {}, "Search ", box), " ", count));
}

export function placeTables() {
  for (const table of document.querySelectorAll("table.sortable")) {
    makeSortable(table);
    if (table.classList.contains("searchable") && table.tBodies[0].rows.length > 12) makeSearchable(table);
  }
}
