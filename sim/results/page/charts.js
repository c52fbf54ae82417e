// Charts of the page's own description (page_chart.hpp), drawn by ECharts as SVG.
import * as echarts from "echarts/core";
import {BarChart, CustomChart, LineChart, ScatterChart} from "echarts/charts";
import {AriaComponent, GridComponent, TooltipComponent} from "echarts/components";
import {SVGRenderer} from "echarts/renderers";
import {colour, element, escaped, figures, tick} from "./figures.js";
import {decal, legend, look} from "./legend.js";

echarts.use([BarChart, LineChart, ScatterChart, CustomChart, GridComponent, TooltipComponent, AriaComponent, SVGRenderer]);

export function text() { return {color: colour("soft"), fontFamily: getComputedStyle(document.body).fontFamily, fontSize: 12}; }

function valueAxis(axis, grid = true) {
  const log = axis.log === true;
  const scaled = axis.fit === true;
  return {
    type: log ? "log" : "value",
    min: axis.min ?? undefined,
    max: axis.max ?? undefined,
    interval: axis.step ?? undefined,
    scale: scaled,
    axisLabel: {...text(), formatter: (value) => tick(value), hideOverlap: true},
    splitLine: {show: grid, lineStyle: {color: colour("grid")}},
    axisLine: {show: true, onZero: false, lineStyle: {color: colour("rule")}},
    axisTick: {show: false},
    minorTick: {show: false},
    nameTextStyle: text(),
  };
}

function labelAxis(labels, across, width) {
  const room = across ? Math.min(150, width * 0.3) : Math.max(24, (width - 70) / labels.length);
  const longest = Math.max(...labels.map((label) => label.length)) * 6.4;
  return {
    type: "category",
    data: labels,
    inverse: across,
    axisTick: {show: false},
    axisLine: {lineStyle: {color: colour("rule")}},
    axisLabel: {
      ...text(),
      interval: labels.length > 40 ? "auto" : 0,
      rotate: !across && longest > room && room < 70 ? 40 : 0,
      width: across || room >= 70 ? room - 6 : 130,
      overflow: across || room < 70 ? "truncate" : "break"
    },
  };
}

// Markers tell lines apart; along a long line only some are shown, of each series at other places.
function sparse(count, index) {
  if (count <= 24) return 7;
  const every = Math.ceil(count / 9);
  return (_, point) => (point.dataIndex % every === Math.floor(((index % 4) + 0.5) * every / 4) ? 7 : 0);
}

function seriesOption(chart, one, index, count) {
  const form = look(one, index);
  const isLine = chart.kind === "lines" || one.right;
  const stacked = !isLine && chart.kind !== "columns";
  const points = one.points ??
      (one.x               ? one.values.map((value, i) => [one.x[i], value]) :
           chart.x.numbers ? one.values.map((value, i) => [chart.x.numbers[i], value]) :
                             one.values);
  const shared = {name: one.name, animation: false, yAxisIndex: one.right ? 1 : 0, data: points, emphasis: {focus: "series"}};
  if (isLine)
    return {
      ...shared,
      type: "line",
      symbol: form.marker,
      symbolSize: one.loose ? 10 : sparse(points.length, index),
      showSymbol: true,
      connectNulls: false,
      lineStyle: {color: form.colour, width: one.loose ? 0 : 2, type: form.dash.length ? form.dash : "solid"},
      itemStyle: {color: form.colour, borderWidth: 1.5},
      z: one.right ? 5 : 3,
    };
  if (chart.kind === "areas")
    return {
      ...shared,
      type: "line",
      symbol: "none",
      z: 3 + (count - index) * 0.01,
      lineStyle: {color: colour("paper"), width: 1},
      itemStyle: {color: form.colour, decal: decal(form.pattern)},
      areaStyle: {color: form.colour, opacity: 1, decal: decal(form.pattern)},
      emphasis: {disabled: true},
    };
  return {
    ...shared,
    yAxisIndex: chart.across ? 0 : shared.yAxisIndex,
    type: "bar",
    stack: stacked ? "all" : undefined,
    barMaxWidth: 46,
    barMinWidth: 2,
    itemStyle: {color: form.colour, borderColor: colour("paper"), borderWidth: count > 1 && stacked ? 0.8 : 0, decal: decal(form.pattern)},
  };
}

function tooltip(chart, view) {
  return {
    trigger: "axis",
    confine: true,
    renderMode: "html",
    backgroundColor: colour("raised"),
    borderColor: colour("rule"),
    textStyle: {...text(), color: colour("ink")},
    axisPointer: {
      type: chart.kind === "bars" || chart.kind === "columns" ? "shadow" : "line",
      lineStyle: {color: colour("soft")},
      shadowStyle: {color: colour("shade")}
    },
    formatter(points) {
      const many = Array.isArray(points) ? points : [points];
      const at = chart.x.labels ? many[0].name : `${figures(many[0].axisValue ?? many[0].value[0])} ${chart.x.unit}`;
      const rows = many.map((point) => {
        const value = Array.isArray(point.value) ? point.value[point.value.length - 1] : point.value;
        const series = view.series.find((one) => one.name === point.seriesName);
        return `<tr><td>${point.marker ?? ""}${escaped(point.seriesName)}</td><td class="n">${escaped(figures(value))} ${
            escaped(series?.right ? view.right.unit : view.y.unit)}</td></tr>`;
      });
      return `<strong>${escaped(at)}</strong><table class="tip">${rows.join("")}</table>`;
    },
  };
}

// Areas over numbers are stacked here: the library would stack along the wrong axis. Each is drawn down to zero, the lower ones in front.
// A point is x, sum, own value.
function stackedUp(chart, shown) {
  const sums = new Map();
  return shown.map(({one, index}) => {
    const at = one.x ?? chart.x.numbers;
    const points = one.values.map((value, i) => {
      const sum = (sums.get(at[i]) ?? 0) + (value ?? 0);
      sums.set(at[i], sum);
      return [at[i], value === null ? null : sum, value];
    });
    return {one: {...one, points}, index};
  });
}

// Half of the last label along numbers stands beyond the end of its axis.
function endRoom(chart, shown) {
  const last = chart.x.max ?? Math.max(...shown.flatMap(({one}) => one.x ?? chart.x.numbers ?? []));
  return Number.isFinite(last) ? tick(last).length * 3.4 + 6 : 0;
}

function option(chart, view, hidden, width) {
  let shown = view.series.map((one, index) => ({one, index})).filter(({one}) => !hidden.has(one.name));
  if (chart.kind === "areas") shown = stackedUp(chart, shown);
  const labelled = chart.x.labels ? labelAxis(chart.x.labels, chart.across, width) :
                                    {...valueAxis({...chart.x, fit: true}, false), min: chart.x.min ?? "dataMin", max: chart.x.max ?? "dataMax"};
  const ends = chart.x.labels ? 0 : endRoom(chart, shown);
  const vertical = [valueAxis(view.y)];
  if (view.right) vertical.push({...valueAxis(view.right, false), position: "right"});
  const across = chart.across === true;
  if (!across && chart.x.title) Object.assign(labelled, {name: chart.x.title, nameLocation: "middle", nameGap: 30, nameTextStyle: text()});
  if (!across && chart.x.labels && labelled.axisLabel.rotate) labelled.name = undefined;
  return {
    textStyle: text(),
    tooltip: tooltip(chart, view),
    aria: {enabled: true, decal: {show: false}},
    grid:
        {left: 6,
         right: across  ? 24 :
             view.right ? 8 :
                          Math.max(20, ends),
         top: 12,
         bottom: labelled.name ? 30 : 6,
         containLabel: true},
    xAxis: across ? vertical[0] : labelled,
    yAxis: across ? labelled : vertical,
    series: shown.map(({one, index}) => seriesOption(chart, one, index, view.series.length)),
  };
}

// An axis of numbers whose labels stand at the values there are; of those that would touch, only some.
function placesAxis(axis, width) {
  const values = axis.numbers;
  const log = axis.log === true;
  const scale = (value) => (log ? Math.log(value) : value);
  const [low, high] = [scale(values[0]), scale(values[values.length - 1])];
  const pad = 0.04 * (high - low);
  const back = (value) => (log ? Math.exp(value) : value);
  let digits = 4;
  while (digits < 9 && new Set(values.map((value) => tick(value, digits))).size < values.length) ++digits;
  const half = (value) => tick(value, digits).length * 3.3 + 4;
  const place = (value) => ((scale(value) - low) / (high - low)) * (width - 90);
  const free = (a, b) => Math.abs(place(a) - place(b)) >= half(a) + half(b);
  const last = values[values.length - 1];
  const labelled = [];
  for (const value of values.slice(0, -1))
    if (free(value, last) && (!labelled.length || free(value, labelled[labelled.length - 1]))) labelled.push(value);
  labelled.push(last);
  const made = valueAxis({...axis, fit: true}, false);
  return {
    ...made,
    min: back(low - pad),
    max: back(high + pad),
    axisTick: {show: true, customValues: values, lineStyle: {color: colour("rule")}},
    axisLabel: {...text(), customValues: labelled, formatter: (value) => tick(value, digits)},
  };
}

// A mean with the span from smallest to largest.
function spanOption(chart, view, width) {
  const {low, mean, high} = view;
  const ink = colour("series-1");
  const at = chart.x.numbers ?? chart.x.labels.map((_, i) => i);
  const along = chart.x.numbers ? placesAxis(chart.x, width) : labelAxis(chart.x.labels, false, width);
  if (chart.x.numbers || !along.axisLabel.rotate) Object.assign(along, {name: chart.x.title, nameLocation: "middle", nameGap: 30, nameTextStyle: text()});
  return {
    textStyle: text(),
    grid: {left: 6, right: 20, top: 12, bottom: along.name ? 30 : 6, containLabel: true},
    xAxis: along,
    yAxis: valueAxis({...view.y, fit: true}),
    tooltip: {
      ...tooltip(chart, view),
      formatter: (points) => {
        const i = (Array.isArray(points) ? points[0] : points).dataIndex;
        const where = chart.x.numbers ? `${figures(at[i])} ${chart.x.unit}` : chart.x.labels[i];
        return `<strong>${escaped(where)}</strong><br>mean ${escaped(figures(mean[i]))} ${escaped(view.y.unit)}<br>from ${
            escaped(figures(low[i]))} to ${escaped(figures(high[i]))}`;
      },
    },
    series: [
      {
        type: "custom",
        animation: false,
        data: at.map((place, i) => [place, low[i], high[i]]),
        encode: {x: 0, y: [1, 2]},
        renderItem: (_, api) => {
          const [x, bottom] = api.coord([api.value(0), api.value(1)]);
          const top = api.coord([api.value(0), api.value(2)])[1];
          const style = {stroke: ink, lineWidth: 1.5, opacity: 0.65};
          const line = (x1, y1, x2, y2) => ({type: "line", shape: {x1, y1, x2, y2}, style});
          return {type: "group", children: [line(x, bottom, x, top), line(x - 5, top, x + 5, top), line(x - 5, bottom, x + 5, bottom)]};
        },
      },
      {
        type: "line",
        animation: false,
        data: at.map((place, i) => [place, mean[i]]),
        symbol: "circle",
        symbolSize: 8,
        showAllSymbol: true,
        lineStyle: {color: ink, width: chart.x.numbers ? 1.5 : 0},
        itemStyle: {color: ink}
      },
    ],
  };
}

export function plate(holder, height) {
  const canvas = element("div", {class: "canvas"});
  canvas.style.height = `${height}px`;
  holder.append(canvas);
  return canvas;
}

export function started(canvas) { return echarts.init(canvas, null, {renderer: "svg", width: canvas.clientWidth || 600}); }

function chooser(chart, state, redraw) {
  if (chart.views.length < 2) return null;
  const select = element("select", {"aria-label": chart.choose || "Show"}, ...chart.views.map((view, i) => element("option", {value: i}, view.name)));
  select.addEventListener("change", () => {
    state.view = Number(select.value);
    redraw();
  });
  return element("label", {class: "choose"}, `${chart.choose || "Show"} `, select);
}

// Puts a chart into its figure; what it gives redraws it, after a change of theme or width.
export function place(holder, chart) {
  const state = {view: 0, hidden: new Set()};
  const controls = element("div", {class: "controls"});
  const unitLine = element("div", {class: "y-title"});
  const legendPlace = element("div", {});
  const height = chart.across ? Math.max(150, 46 + 46 * chart.x.labels.length) : chart.height || 300;
  holder.append(controls, legendPlace, unitLine);
  const canvas = plate(holder, height);
  const drawing = started(canvas);
  const choice = chooser(chart, state, () => redraw());
  if (choice) controls.append(choice);

  function redraw(kept) {
    const view = chart.views[state.view];
    unitLine.replaceChildren(element("span", {}, view.y.title || ""), element("span", {}, view.right ? view.right.title : ""));
    const width = canvas.clientWidth || 600;
    if (chart.kind === "spans")
      drawing.setOption(spanOption(chart, view, width), true);
    else {
      const made = legend(view.series, chart.kind, state.hidden, (name) => redraw(name));
      if (view.series.length > 1 || chart.kind === "areas" || chart.kind === "bars")
        legendPlace.replaceChildren(made);
      else
        legendPlace.replaceChildren();
      if (kept !== undefined) [...made.querySelectorAll("button")].find((button) => button.textContent === kept)?.focus();
      drawing.setOption(option(chart, view, state.hidden, width), true);
    }
  }
  redraw();
  return () => {
    drawing.resize({width: canvas.clientWidth});
    redraw();
  };
}
