// The flow diagram: ELK finds the places and the ways of the streams, this file draws them.
import ELK from "elkjs/lib/elk.bundled.js";
import {drawn, element, figures} from "./figures.js";
import {placeLabels} from "./labels.js";
import {flag, heightOf, nozzle, symbolOf} from "./symbols.js";

const rules = {
  "elk.algorithm": "layered",
  "elk.direction": "RIGHT",
  "elk.edgeRouting": "ORTHOGONAL",
  "elk.layered.cycleBreaking.strategy": "MODEL_ORDER",
  "elk.layered.considerModelOrder.strategy": "NODES_AND_EDGES",
  "elk.layered.nodePlacement.strategy": "NETWORK_SIMPLEX",
  "elk.layered.spacing.nodeNodeBetweenLayers": "84",
  "elk.spacing.nodeNode": "46",
  "elk.spacing.edgeNode": "24",
  "elk.spacing.edgeEdge": "18",
  "elk.layered.spacing.edgeEdgeBetweenLayers": "14",
  "elk.layered.spacing.edgeNodeBetweenLayers": "16",
  "elk.padding": "[top=16,left=6,bottom=30,right=6]",
  "elk.layered.thoroughness": "20",
};
const lineHeight = 14;
let ruler;

function textWidth(text, bold = false) {
  ruler ??= document.createElement("canvas").getContext("2d");
  ruler.font = `${bold ? "600 13px" : "12px"} ${getComputedStyle(document.body).fontFamily}`;
  return Math.ceil(ruler.measureText(text).width) + 2;
}

const feedId = (stream) => `feed:${stream.name}`;
const leaveId = (stream) => `leave:${stream.name}`;

function linesOf(stream, flow, chosen) {
  const lines = [];
  for (const column of flow.always) {
    const value = stream.numbers[column];
    if (value === 0 && column !== flow.solids)
      lines.push(`${figures(stream.numbers[flow.mass], 3)} ${flow.columns[flow.mass].unit}`);
    else if (value !== null && !(column === flow.solids && value < 5e-4))
      lines.push(`${figures(value, 3)} ${flow.columns[column].unit}`);
  }
  if (chosen !== null) {
    const {unit} = flow.columns[chosen];
    const value = stream.numbers[chosen];
    if (value !== null && !(value === 0 && stream.from === ""))
      lines.push(unit === "1" ? `${flow.columns[chosen].short} ${figures(value, 3)}` : `${figures(value, 3)} ${unit}`);
  }
  return lines;
}

// Ports of an operation: its streams in, left; out, right; a thickener's where they belong.
function nodeOf(operation, flow) {
  const symbol = symbolOf(operation.kind);
  const label = {text: operation.name, width: Math.max(textWidth(operation.name, true), 10), height: 16 + symbol.top};
  const below = {text: "air", width: 34, height: symbol.bottom + 26, layoutOptions: {"elk.nodeLabels.placement": "OUTSIDE V_BOTTOM H_CENTER"}};
  const taken = flow.streams.filter((stream) => stream.to === operation.name);
  const given = flow.streams.filter((stream) => stream.from === operation.name);
  const node = {
    id: `op:${operation.name}`,
    width: symbol.width,
    height: heightOf(symbol, Math.max(taken.length, given.length)),
    labels: operation.air ? [label, below] : [label],
    ports: [],
    layoutOptions: {
      "elk.nodeLabels.placement": "OUTSIDE V_TOP H_CENTER",
      "elk.portConstraints": symbol.outlets ? "FIXED_POS" : "FIXED_SIDE",
      "elk.spacing.labelNode": "0"
    },
  };
  taken.forEach((stream, i) => {
    const port = {id: `in:${stream.name}`, width: 0, height: 0, layoutOptions: {"elk.port.side": "WEST"}};
    if (symbol.outlets) Object.assign(port, {x: 0, y: ((i + 1) * symbol.inletHeight * 1.3) / (taken.length + 1)});
    node.ports.push(port);
  });
  for (const stream of given) {
    const port = {id: `out:${stream.name}`, width: 0, height: 0, layoutOptions: {"elk.port.side": "EAST"}};
    if (symbol.outlets) {
      const under = stream.name.endsWith(".underflow");
      const [x, y] = symbol.outlets[under ? "underflow" : "overflow"];
      Object.assign(port, {x, y});
      if (under) port.layoutOptions["elk.port.side"] = "SOUTH";
    }
    node.ports.push(port);
  }
  return node;
}

function flagNode(id, text) { return {id, width: textWidth(text, true) + 24, height: 26, text, layoutOptions: {}}; }

function graphOf(flow, chosen) {
  const children = [];
  for (const operation of flow.operations) {
    for (const stream of flow.streams)
      if (stream.from === "" && stream.to === operation.name) children.push(flagNode(feedId(stream), stream.name));
    children.push(nodeOf(operation, flow));
  }
  for (const stream of flow.streams)
    if (stream.to === "") children.push(flagNode(leaveId(stream), stream.leaves || stream.name));
  for (const stream of flow.streams)
    if (stream.to === "" && stream.from === "") children.push(flagNode(feedId(stream), stream.name));
  const edges = flow.streams.map((stream) => {
    return {
      id: `stream:${stream.name}`,
      sources: [stream.from === "" ? feedId(stream) : `out:${stream.name}`],
      targets: [stream.to === "" ? leaveId(stream) : `in:${stream.name}`],
      stream,
      lines: linesOf(stream, flow, chosen),
    };
  });
  return {id: "root", layoutOptions: {...rules}, children, edges};
}

function rounded(points) {
  let d = `M${points[0].x} ${points[0].y}`;
  for (let i = 1; i < points.length - 1; ++i) {
    const [a, b, c] = [points[i - 1], points[i], points[i + 1]];
    const cut = (p, q) => {
      const length = Math.hypot(q.x - p.x, q.y - p.y);
      const r = Math.min(6, length / 2) / (length || 1);
      return {x: p.x + (q.x - p.x) * r, y: p.y + (q.y - p.y) * r};
    };
    const [before, after] = [cut(b, a), cut(b, c)];
    d += `L${before.x} ${before.y}Q${b.x} ${b.y} ${after.x} ${after.y}`;
  }
  const last = points[points.length - 1];
  return `${d}L${last.x} ${last.y}`;
}

function spoken(stream, flow) {
  const numbers =
      flow.columns
          .map(
              (column, i) =>
                  (stream.numbers[i] === null ? null : `${column.name} ${figures(stream.numbers[i])}${column.unit === "1" ? "" : ` ${column.unit}`}`))
          .filter(Boolean);
  return `stream ${stream.name}, ${ways(stream)}: ${numbers.join(", ")}`;
}

function ways(stream) {
  return `${stream.from === "" ? "fed" : `from ${stream.from}`} ${
             stream.to === "" ? `, leaves${stream.leaves ? ` as ${stream.leaves}` : ""}` : `to ${stream.to}`}`
      .replace(" ,", ",");
}

function drawEdge(edge, flow, order, show) {
  const {stream, points, label} = edge;
  const back = stream.from !== "" && stream.to !== "" && order.get(stream.to) <= order.get(stream.from);
  const solids = stream.numbers[flow.solids] > 5e-4;
  const d = rounded(points);
  const group = drawn("g", {
    class: `stream${back ? " back" : ""}${solids ? " pulp" : ""}`,
    tabindex: 0,
    role: "img",
    "aria-label": spoken(stream, flow),
    "data-stream": stream.name
  });
  group.append(drawn("path", {d, class: "reach"}), drawn("path", {d, class: "line", "marker-end": back ? "url(#tip-back)" : "url(#tip)"}));
  if (label) {
    const text = drawn("text", {x: label.x + label.width / 2, y: label.y + lineHeight - 3, "text-anchor": "middle", class: "numbers"});
    edge.lines.forEach((line, i) => text.append(drawn("tspan", {x: label.x + label.width / 2, dy: i === 0 ? 0 : lineHeight}, line)));
    group.append(text);
  }
  for (const event of ["focus", "pointerenter"])
    group.addEventListener(
        event, () => show(stream.name, ways(stream), flow.columns.map((column, i) => [column.name, stream.numbers[i], column.unit])));
  return group;
}

// Air, from below into the vessel.
function airArrow(node, symbol) {
  const x = node.width / 2;
  const end = node.height + symbol.bottom;
  return [
    drawn("path", {d: `M${x} ${end + 22}V${end}`, class: "air", "marker-end": "url(#tip-air)"}),
    drawn("text", {x: x + 6, y: end + 19, class: "numbers"}, "air"),
  ];
}

function drawNode(node, flow, show) {
  const group = drawn("g", {transform: `translate(${node.x} ${node.y})`});
  if (node.text !== undefined) {
    group.setAttribute("class", node.id.startsWith("feed:") ? "end feed" : "end leave");
    group.append(
        flag(node.width, node.height),
        drawn("text", {x: (node.width - 9) / 2, y: node.height / 2 + 4.5, "text-anchor": "middle", class: "name"}, node.text));
    return group;
  }
  const operation = flow.operations.find((one) => `op:${one.name}` === node.id);
  const symbol = symbolOf(operation.kind);
  const facts = operation.facts.filter((fact) => fact.value !== null);
  const said = facts.map((fact) => `${fact.name} ${figures(fact.value)} ${fact.unit === "1" ? "" : fact.unit}`).join(", ");
  for (const [key, value] of Object.entries({
         class: "operation",
         tabindex: 0,
         role: "img",
         "data-operation": operation.name,
         "aria-label": `${operation.kind} ${operation.name}${operation.air ? ", air sparged" : ""}${said ? `: ${said}` : ""}`
       }))
    group.setAttribute(key, value);
  group.append(...symbol.draw(node.height));
  if (operation.air) group.append(...airArrow(node, symbol));
  for (const port of node.ports ?? []) {
    const made = nozzle(symbol, node.height, port.id.startsWith("in:") ? "left" : "right", port.y);
    if (made) group.append(made);
  }
  group.append(drawn("text", {x: node.width / 2, y: -symbol.top - 4, "text-anchor": "middle", class: "name"}, operation.name));
  for (const event of ["focus", "pointerenter"])
    group.addEventListener(event, () => show(operation.name, operation.kind, facts.map((fact) => [fact.name, fact.value, fact.unit])));
  return group;
}

function tips() {
  const tip = (id, kind) => drawn(
      "marker", {id, viewBox: "0 0 10 10", refX: 9, refY: 5, markerWidth: 10, markerHeight: 10, orient: "auto", markerUnits: "userSpaceOnUse"},
      drawn("path", {d: "M0 1L10 5L0 9Z", class: kind}));
  return drawn("defs", {}, tip("tip", "tip"), tip("tip-back", "tip back"), tip("tip-air", "tip air"));
}

// Figures go where they cover least; a node's block holds its name too.
function label(placed) {
  const blocks = placed.children.map((node) => {
    const above = node.labels?.[0]?.height ?? 0;
    const wide = Math.max(node.width, node.labels?.[0]?.width ?? 0);
    return {x: node.x + node.width / 2 - wide / 2 - 3, y: node.y - above, width: wide + 6, height: node.height + above + (node.labels?.[1]?.height ?? 10)};
  });
  for (const edge of placed.edges) {
    edge.points = edge.sections.flatMap((section) => [section.startPoint, ...(section.bendPoints ?? []), section.endPoint]);
    edge.width = edge.lines.length ? Math.max(...edge.lines.map((line) => textWidth(line))) : 0;
    edge.height = edge.lines.length * lineHeight;
  }
  placeLabels(placed.edges, blocks, placed).forEach((place, i) => {
    placed.edges[i].label = place;
    if (place) placed.height = Math.max(placed.height, place.y + place.height + 8);
  });
}

// In one row if that is not much wider than the frame; else broken into rows, like lines of text.
async function layout(elk, flow, chosen, width) {
  const target = Math.max(width, 860);
  let placed = await elk.layout(graphOf(flow, chosen));
  for (const aspect of [3.4, 2.8, 2.3, 1.9, 1.5, 1.2, 0.9]) {
    if (placed.width <= 1.2 * target) break;
    const graph = graphOf(flow, chosen);
    Object.assign(
        graph.layoutOptions,
        {"elk.layered.wrapping.strategy": "MULTI_EDGE", "elk.aspectRatio": String(aspect), "elk.layered.wrapping.additionalEdgeSpacing": "18"});
    const wrapped = await elk.layout(graph);
    if (wrapped.edges.every((edge) => edge.sections)) placed = wrapped;
  }
  label(placed);
  return placed;
}

function picture(placed, flow, show) {
  const svg = drawn("svg", {viewBox: `0 0 ${Math.ceil(placed.width)} ${Math.ceil(placed.height)}`, role: "group", "aria-label": "Flow diagram"});
  svg.append(tips());
  const order = new Map(flow.operations.map((operation, i) => [operation.name, i]));
  const streams = placed.edges.map((edge) => drawEdge(edge, flow, order, show));
  svg.append(...streams, ...placed.children.map((node) => drawNode(node, flow, show)));
  return svg;
}

function panelOf() {
  const panel = element(
      "div", {class: "panel", "aria-live": "polite"},
      element("p", {class: "hint"}, "Point at a stream or a unit, or step through them with the Tab key, to see its numbers here."));
  const show = (name, what, numbers) => {
    const list = element("dl", {});
    for (const [label, value, unit] of numbers)
      if (value !== null)
        list.append(
            element("div", {}, element("dt", {}, label), element("dd", {}, `${figures(value)}${unit === "1" || unit === "" ? "" : ` ${unit}`}`)));
    panel.replaceChildren(element("p", {}, element("strong", {}, name), ` ${what}`), list);
  };
  return {panel, show};
}

window.leatDiagram = async (holder, flow) => {
  const elk = new ELK();
  const {panel, show} = panelOf();
  const frame = element("div", {class: "frame", tabindex: 0, role: "region", "aria-label": "Flow diagram, scrolls"});
  const choice = element(
      "select", {}, element("option", {value: ""}, "nothing more"),
      ...flow.columns.map(
          (column, i) =>
              (flow.always.includes(i) ? null : element("option", {value: i}, `${column.name}${column.unit === "1" ? "" : `, ${column.unit}`}`))));
  const controls = element("div", {class: "controls"}, element("label", {class: "choose"}, "Show on the streams, besides flow and solids: ", choice));
  const zoom = {scale: 1, svg: null, width: 1};
  const apply = () => {
    zoom.svg.setAttribute("width", Math.round(zoom.width * zoom.scale));
  };
  const fit = () => {
    zoom.scale = Math.min(1.1, Math.max(0.8, (frame.clientWidth - 4) / zoom.width));
    apply();
  };
  for (const [label, text, change] of [
           ["Smaller", "−", () => (zoom.scale = Math.max(0.3, zoom.scale / 1.2))],
           ["Larger", "+", () => (zoom.scale = Math.min(3, zoom.scale * 1.2))],
           ["Fit the width", "whole width", () => (zoom.scale = (frame.clientWidth - 4) / zoom.width)]]) {
    const button = element("button", {type: "button", class: "plain", "aria-label": label}, text);
    button.addEventListener("click", () => {
      change();
      apply();
    });
    controls.append(button);
  }
  const figuresKey = element("em", {});
  const key = element(
      "p", {class: "key"}, element("span", {class: "pulp"}, "with solids"), element("span", {class: "liquor"}, "liquor alone"),
      element("span", {class: "back"}, "back to an earlier unit"),
      flow.operations.some((operation) => operation.air) ? element("span", {class: "air"}, "air sparged") : "", figuresKey);
  holder.append(controls, key, frame, panel);
  async function redraw(first) {
    const chosen = choice.value === "" ? null : Number(choice.value);
    const placed = await layout(elk, flow, chosen, frame.clientWidth);
    figuresKey.textContent = `Figures: ${
            [...flow.always, ...(chosen === null ? [] : [chosen])]
                .map((column) => flow.columns[column].name)
                .join(", ")}; mass where nothing but a dry reagent flows.`;
    zoom.svg = picture(placed, flow, show);
    zoom.width = placed.width;
    frame.replaceChildren(zoom.svg);
    if (first)
      fit();
    else
      apply();
  }
  choice.value = flow.chosen === null ? "" : String(flow.chosen);
  choice.addEventListener("change", () => redraw(false));
  await redraw(true);
};
