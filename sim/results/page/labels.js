// Places for the figures beside the streams: each takes the place along its stream where it covers least of anything else.

const overlap = (a, b) => Math.max(0, Math.min(a.x + a.width, b.x + b.width) - Math.max(a.x, b.x)) *
    Math.max(0, Math.min(a.y + a.height, b.y + b.height) - Math.max(a.y, b.y));

function thick([a, b]) {
  return {x: Math.min(a.x, b.x) - 2, y: Math.min(a.y, b.y) - 2, width: Math.abs(a.x - b.x) + 4, height: Math.abs(a.y - b.y) + 4};
}

function candidates(points, box) {
  const found = [];
  for (let i = 1; i < points.length; ++i) {
    const [a, b] = [points[i - 1], points[i]];
    const level = Math.abs(a.y - b.y) < 1;
    const length = Math.hypot(a.x - b.x, a.y - b.y);
    const needed = level ? box.width : box.height;
    for (const share of [0.5, 0.3, 0.7, 0.15, 0.85]) {
      const x = a.x + (b.x - a.x) * share;
      const y = a.y + (b.y - a.y) * share;
      const penalty = Math.max(0, needed - length) * 4 + Math.abs(share - 0.5) * 30 - Math.min(length, 400) * 0.05 + (level ? 0 : 40);
      if (level)
        found.push({x: x - box.width / 2, y: y + 4, ...box, penalty}, {x: x - box.width / 2, y: y - box.height - 4, ...box, penalty: penalty + 2});
      else
        found.push({x: x + 5, y: y - box.height / 2, ...box, penalty}, {x: x - box.width - 5, y: y - box.height / 2, ...box, penalty: penalty + 2});
    }
  }
  return found;
}

// edges: [{points, width, height}] become [{x, y}], in the same order; blocks: rectangles that must stay free.
export function placeLabels(edges, blocks, size) {
  const lines = edges.flatMap((edge) => edge.points.slice(1).map((point, i) => thick([edge.points[i], point])));
  const taken = [...blocks];
  return edges.map((edge) => {
    if (!edge.width) return null;
    let best = null;
    for (const place of candidates(edge.points, {width: edge.width, height: edge.height})) {
      let cost = place.penalty;
      for (const block of taken) cost += 4 * overlap(place, block);
      for (const line of lines) cost += 1.5 * overlap(place, line);
      if (place.x < 0 || place.y < 0 || place.x + place.width > size.width || place.y + place.height > size.height) cost += 500;
      if (!best || cost < best.cost) best = {...place, cost};
    }
    taken.push(best);
    return best;
  });
}
