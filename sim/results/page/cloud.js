// The scatter of a campaign: two results against each other, coloured by an input, all three chosen by the reader.
import {colour, drawn, element, escaped, figures, tick} from "./figures.js";
import {marker} from "./legend.js";
import {plate, started, text} from "./charts.js";

const shapes = ["circle", "rect", "triangle", "diamond", "emptyCircle", "emptyRect", "emptyTriangle", "emptyDiamond"];

function select(label, names, chosen, changed) {
  const box = element("select", {}, ...names.map((name, i) => element("option", {value: i, ...(i === chosen ? {selected: ""} : {})}, name)));
  box.addEventListener("change", () => changed(Number(box.value)));
  return element("label", {class: "choose"}, `${label} `, box);
}

// Distinct values of an input, numbers by size, others in the order in which they first come; more than eight are put into eight neighbouring groups.
function groups(values) {
  const distinct = [...new Set(values)];
  if (distinct.every((value) => Number.isFinite(parseFloat(value)))) distinct.sort((a, b) => parseFloat(a) - parseFloat(b));
  const per = Math.ceil(distinct.length / 8);
  const group = new Map(distinct.map((value, i) => [value, Math.floor(i / per)]));
  const names = [];
  for (let i = 0; i < distinct.length; i += per) {
    const last = distinct[Math.min(i + per, distinct.length) - 1];
    names.push(distinct[i] === last ? distinct[i] : `${distinct[i]} to ${last}`);
  }
  return {names, of: values.map((value) => group.get(value))};
}

export function placeCloud(holder, cloud) {
  const state = {x: 0, y: Math.min(1, cloud.results.length - 1), tone: 0};
  const controls = element("div", {class: "controls"});
  const key = element("ul", {class: "legend", "aria-label": "Legend"});
  const unitLine = element("div", {class: "y-title"});
  holder.append(controls, key, unitLine);
  const canvas = plate(holder, 380);
  const drawing = started(canvas);
  const names = cloud.results.map((one) => one.name);
  controls.append(select("Across", names, state.x, (i) => {
                    state.x = i;
                    redraw();
                  }), select("Up", names, state.y, (i) => {
                    state.y = i;
                    redraw();
                  }));
  if (cloud.inputs.length)
    controls.append(select("Colour by", cloud.inputs.map((one) => one.name), 0, (i) => {
      state.tone = i;
      redraw();
    }));

  function axis(one, grid) {
    return {
      type: "value",
      scale: true,
      axisLabel: {...text(), formatter: (value) => tick(value), hideOverlap: true},
      axisTick: {show: false},
      splitLine: {show: grid, lineStyle: {color: colour("grid")}},
      axisLine: {show: true, onZero: false, lineStyle: {color: colour("rule")}},
      nameTextStyle: text(),
    };
  }
  function redraw() {
    const x = cloud.results[state.x];
    const y = cloud.results[state.y];
    const input = cloud.inputs[state.tone];
    const grouped = input ? groups(input.values) : {names: ["cases"], of: x.values.map(() => 0)};
    unitLine.replaceChildren(element("span", {}, y.title));
    key.replaceChildren(...grouped.names.map((name, i) => {
      const dot = drawn(
          "svg", {width: 12, height: 12, viewBox: "9 0 12 12", "aria-hidden": "true"},
          marker({marker: shapes[i], colour: colour(`series-${i + 1}`)}));
      return element("li", {}, dot, ` ${name}`);
    }));
    drawing.setOption(
        {
          textStyle: text(),
          grid: {left: 6, right: 20, top: 12, bottom: 26, containLabel: true},
          xAxis: {...axis(x, false), name: x.title, nameLocation: "middle", nameGap: 30},
          yAxis: axis(y, true),
          tooltip: {
            trigger: "item",
            confine: true,
            backgroundColor: colour("raised"),
            borderColor: colour("rule"),
            textStyle: {...text(), color: colour("ink")},
            formatter: (point) => {
              const i = point.value[2];
              const inputs = cloud.inputs.map((one) => `<tr><td>${escaped(one.name)}</td><td class="n">${escaped(one.values[i])}</td></tr>`);
              const results = cloud.results.map(
                  (one) => `<tr><td>${escaped(one.name)}</td><td class="n">${escaped(figures(one.values[i]))} ${escaped(one.unit)}</td></tr>`);
              return `<strong>case ${cloud.numbers[i]}</strong><table class="tip">${inputs.join("")}${results.join("")}</table>`;
            },
          },
          series: grouped.names.map((name, group) => ({
                                      type: "scatter",
                                      name,
                                      animation: false,
                                      symbol: shapes[group],
                                      symbolSize: 8,
                                      itemStyle: {color: colour(`series-${group + 1}`), opacity: 0.85, borderWidth: 1.5},
                                      data: x.values.map((value, i) => [value, y.values[i], i])
                                                .filter((point) => grouped.of[point[2]] === group && point[0] !== null && point[1] !== null),
                                    })),
        },
        true);
  }
  redraw();
  return () => {
    drawing.resize({width: canvas.clientWidth});
    redraw();
  };
}
