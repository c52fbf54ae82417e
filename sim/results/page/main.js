// Starts the page: charts, diagram, tables. Everything it draws stands in the data block, which C++ wrote.
import {place} from "./charts.js";
import {placeCloud} from "./cloud.js";
import {markContents, placeCopyButtons} from "./pages.js";
import {placeTables} from "./tables.js";

const data = JSON.parse(document.getElementById("page-data").textContent);
const redraws = [];

function draw(holder) {
  const chart = data.charts.find((one) => one.id === holder.dataset.chart);
  if (chart) redraws.push(chart.kind === "cloud" ? placeCloud(holder, chart) : place(holder, chart));
}

for (const holder of document.querySelectorAll("[data-chart]")) draw(holder);
const diagram = document.querySelector("[data-diagram]");
const drawnDiagram = diagram && data.flow && window.leatDiagram ? window.leatDiagram(diagram, data.flow) : Promise.resolve();
placeTables();
placeCopyButtons();
markContents();

function redrawAll() {
  for (const redraw of redraws) redraw();
}
let width = innerWidth;
let waiting = 0;
addEventListener("resize", () => {
  if (innerWidth === width) return;
  width = innerWidth;
  clearTimeout(waiting);
  waiting = setTimeout(redrawAll, 120);
});
document.documentElement.addEventListener("themechange", redrawAll);
matchMedia("(prefers-color-scheme: dark)").addEventListener("change", redrawAll);
// On paper always light, as wide as the paper.
let before;
addEventListener("beforeprint", () => {
  before = document.documentElement.dataset.theme;
  document.documentElement.dataset.theme = "light";
  redrawAll();
});
addEventListener("afterprint", () => {
  if (before)
    document.documentElement.dataset.theme = before;
  else
    delete document.documentElement.dataset.theme;
  redrawAll();
});
drawnDiagram.then(() => document.documentElement.classList.add("drawn"));
