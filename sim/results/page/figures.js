// Numbers and texts as a person reads them.

export function figures(value, digits = 4) {
  if (value === null || value === undefined || Number.isNaN(value)) return "–";
  if (value === 0) return "0";
  const size = Math.abs(value);
  if (size < 1e-4 || size >= 1e7) {
    const [mantissa, exponent] = value.toExponential(digits - 1).split("e");
    return `${mantissa} × 10${raised(Number(exponent))}`;
  }
  const whole = Math.floor(Math.log10(size)) + 1;
  return whole >= digits ? String(Math.round(value)) : Number(value.toPrecision(digits)).toFixed(Math.min(12, Math.max(0, digits - whole)));
}

export function raised(number) {
  const signs = {"-": "⁻", 0: "⁰", 1: "¹", 2: "²", 3: "³", 4: "⁴", 5: "⁵", 6: "⁶", 7: "⁷", 8: "⁸", 9: "⁹"};
  return [...String(number)].map((sign) => signs[sign]).join("");
}

// For an axis: short, no trailing zeros.
export function tick(value, digits = 6) {
  if (value === 0) return "0";
  const size = Math.abs(value);
  if (size < 1e-3 || size >= 1e6) {
    const [mantissa, exponent] = value.toExponential(2).split("e");
    const front = Number(mantissa);
    return (front === 1 ? "" : `${front} × `) + `10${raised(Number(exponent))}`;
  }
  return String(Number(value.toPrecision(digits)));
}

export function escaped(text) { return String(text).replace(/[&<>"']/g, (sign) => `&#${sign.charCodeAt(0)};`); }

// An element with attributes and children; texts become text nodes, so that no name from a file is ever markup.
export function element(name, attributes = {}, ...children) {
  const made = document.createElement(name);
  return filled(made, attributes, children);
}

export function drawn(name, attributes = {}, ...children) {
  const made = document.createElementNS("http://www.w3.org/2000/svg", name);
  return filled(made, attributes, children);
}

function filled(made, attributes, children) {
  for (const [key, value] of Object.entries(attributes))
    if (value !== undefined && value !== null) made.setAttribute(key, value);
  made.append(...children.filter((child) => child !== null && child !== undefined));
  return made;
}

export function colour(name) { return getComputedStyle(document.documentElement).getPropertyValue(`--${name}`).trim(); }
