// How a series looks: colour, dash, marker and pattern together, so that colour is never the only sign. And the legend, in HTML.
import {colour, drawn, element} from "./figures.js";

const dashes = [[], [7, 4], [2, 3], [9, 3, 2, 3], [12, 4], [4, 2], [1, 4], [10, 3, 2, 3, 2, 3]];
const markers = ["circle", "rect", "triangle", "diamond", "emptyCircle", "emptyRect", "emptyTriangle", "emptyDiamond"];

export function look(series, index) {
  if (series.rest)
    return {colour: colour(series.rest), dash: [], marker: "none", pattern: series.rest === "rest-formed" ? 6 : series.rest === "rest-lost" ? 5 : 0};
  const n = series.look ?? index;
  return {
    colour: colour(`series-${(n % 8) + 1}`),
    loose: series.loose === true,
    dash: series.dash ?? dashes[(n + Math.floor(n / 8)) % 8],
    marker: markers[n % 8],
    pattern: (n % 8) + 1
  };
}

// Patterns of stacked areas and bars, as the chart library describes them; thin and light.
export function decal(pattern) {
  const ink = colour("pattern");
  const stripes = (gap, rotation, width = 1) => ({symbol: "rect", color: ink, dashArrayX: [1, 0], dashArrayY: [width, gap], rotation, symbolSize: 1});
  const dots = (gap, size) => ({symbol: "circle", color: ink, dashArrayX: [[gap, gap], [0, gap, gap, 0]], dashArrayY: [gap, 0], symbolSize: size});
  const all = {
    2: stripes(7, Math.PI / 4),
    3: dots(5, 0.35),
    4: stripes(7, -Math.PI / 4),
    5: stripes(4, Math.PI / 2),
    6: stripes(4, 0),
    7: dots(8, 0.3),
    8: stripes(4, Math.PI / 4),
  };
  return all[pattern] ?? {symbol: "none"};
}

function swatch(form, kind) {
  const lines = kind === "lines";
  const picture = drawn("svg", {width: lines ? 30 : 16, height: 12, viewBox: lines ? "0 0 30 12" : "0 0 16 12", "aria-hidden": "true"});
  if (lines) {
    const line = {x1: 0, y1: 6, x2: 30, y2: 6, stroke: form.colour, "stroke-width": 2, "stroke-dasharray": form.dash.join(" ") || undefined};
    if (!form.loose) picture.append(drawn("line", line));
    picture.append(marker(form));
  } else {
    picture.append(drawn("rect", {x: 0.5, y: 0.5, width: 15, height: 11, fill: form.colour, stroke: colour("rule")}));
    const ink = {stroke: colour("pattern"), "stroke-width": 1, fill: "none"};
    const paths = {
      2: "M0 11L11 0M5 12L16 1",
      4: "M0 1L11 12M5 0L16 11",
      8: "M0 6L6 0M0 11L11 0M4 12L16 0M10 12L16 6",
      5: "M4 0V12M8 0V12M12 0V12",
      6: "M0 3H16M0 6H16M0 9H16"
    };
    if (paths[form.pattern]) picture.append(drawn("path", {d: paths[form.pattern], ...ink}));
    if (form.pattern === 3 || form.pattern === 7)
      for (const [x, y] of [[4, 4], [8, 8], [12, 4]]) picture.append(drawn("circle", {cx: x, cy: y, r: 1, fill: colour("pattern")}));
  }
  return picture;
}

export function marker(form) {
  const hollow = form.marker.startsWith("empty");
  const ink = {fill: hollow ? colour("paper") : form.colour, stroke: form.colour, "stroke-width": 1.5};
  const shape = form.marker.replace("empty", "").toLowerCase();
  if (shape === "none") return "";
  if (shape === "circle") return drawn("circle", {cx: 15, cy: 6, r: 3.5, ...ink});
  const d = {rect: "M12 3H18V9H12Z", triangle: "M15 2L19 9H11Z", diamond: "M15 2L19 6L15 10L11 6Z"}[shape];
  return drawn("path", {d, ...ink});
}

// Buttons that take a series out of the chart and put it back.
export function legend(series, kind, hidden, changed) {
  const list = element("ul", {class: "legend", "aria-label": "Legend: press to hide or show"});
  series.forEach((one, index) => {
    const button = element(
        "button", {type: "button", "aria-pressed": hidden.has(one.name) ? "false" : "true"}, swatch(look(one, index), one.right ? "lines" : kind),
        element("span", {}, one.name));
    button.addEventListener("click", () => {
      if (!hidden.delete(one.name)) hidden.add(one.name);
      changed(one.name);
    });
    list.append(element("li", {}, button));
  });
  return list;
}
