// Symbols of the flow diagram, drawn for this page in the spirit of process drawings: outline, what turns or settles, level.
// A symbol has a size, sides its streams may use, and a drawing in its own coordinates. Sides left and right are straight walls or
// are met by a short nozzle, so that a stream always ends at the outline.
import {drawn} from "./figures.js";

const path = (d, kind = "outline") => drawn("path", {d, class: kind});

function tank(h) {
  return [
    path(`M0 0V${h}Q28 ${h + 16} 56 ${h}V0Z`, "body"),
    path("M0 12H56", "level"),
    path(`M28 -6V${h - 14}`, "shaft"),
    path("M23 -16H33V-6H23Z", "body"),
    path(`M28 ${h - 14}c-8 -8 -14 -6 -15 0c1 6 7 8 15 0c8 8 14 6 15 0c-1 -6 -7 -8 -15 0Z`, "body"),
  ];
}

function surge(h) {
  return [path(`M0 0V${h}H64V0`, "body open"), path("M0 12Q8 8 16 12T32 12T48 12T64 12", "level"), path("M28 3H36L32 9Z", "mark")];
}

function thickener() {
  return [
    path("M0 0V18L43 52H53L96 18V0Z", "body"),
    path("M0 7H96", "level"),
    path("M48 -10V40", "shaft"),
    path("M43 -16H53V-10H43Z", "body"),
    path("M14 22L46 46M82 22L50 46", "shaft"),
    path("M22 22V28M32 30V36M74 22V28M64 30V36", "shaft"),
  ];
}

const mixer = (h) => [path(`M0 0V${h}L36 ${h / 2}Z`, "body")];
const splitter = (h) => [path(`M36 0V${h}L0 ${h / 2}Z`, "body")];

const symbols = {
  tank: {width: 56, height: 64, top: 18, bottom: 10, draw: tank},
  surge: {width: 64, height: 46, top: 4, bottom: 2, draw: surge},
  thickener: {width: 96, height: 52, top: 18, bottom: 2, draw: thickener, outlets: {overflow: [96, 10], underflow: [48, 52]}, inletHeight: 12},
  mixer: {width: 36, height: 44, top: 2, bottom: 2, draw: mixer, slanted: "right"},
  splitter: {width: 36, height: 44, top: 2, bottom: 2, draw: splitter, slanted: "left"},
};
const other = {
  width: 60,
  height: 48,
  top: 2,
  bottom: 2,
  draw: (h) => [drawn("rect", {width: 60, height: h, rx: 6, class: "body"})]
};

export function symbolOf(kind) { return symbols[kind] ?? other; }

// As high as its streams need, but for a thickener, whose outlets have their own places.
export function heightOf(symbol, streams) { return symbol.outlets ? symbol.height : Math.max(symbol.height, 20 * (streams + 1)); }

// A flag: what is fed from outside, or leaves.
export function flag(width, height) { return path(`M0 0H${width - 11}L${width} ${height / 2}L${width - 11} ${height}H0Z`, "flag"); }

// From the port on a symbol's box to its slanted side.
export function nozzle(symbol, height, side, y) {
  if (symbol.slanted !== side) return null;
  const reach = (Math.abs(y - height / 2) / (height / 2)) * symbol.width;
  if (reach < 0.5) return null;
  return side === "left" ? path(`M0 ${y}H${reach}`, "nozzle") : path(`M${symbol.width} ${y}H${symbol.width - reach}`, "nozzle");
}
