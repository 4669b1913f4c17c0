// The board from the inlined numbers, and what lies under or near a point. Lengths are nanometres, y up.

/** Return the board: its shapes in painting order, and for each layer which of them are its own. */
function readBoard(data) {
  const shapes = [];
  const layers = data.layers.map((layer, index) => {
    const own = [...polygonsOf(layer.shapes), ...circlesOf(layer.circles)];
    own.sort((a, b) => a.style - b.style);
    const from = shapes.length;
    for (const shape of own) {
      shape.layer = index;
      shape.order = shapes.length;
      shapes.push(shape);
    }
    return { name: layer.name, text: layer.text, on: layer.shown, rank: layer.rank, from, to: shapes.length };
  });
  const numbers = new Map(data.items.map((item, number) => [item.key, number]));
  const board = { ...data, shapes, layers, numbers };
  board.extent = boxOf(shapes);
  return board;
}

/** Yield the polygons of a layer's flat list: item, style, outlines as steps from vertex to vertex. */
function* polygonsOf(flat) {
  for (let at = 0; at < flat.length; ) {
    const shape = { item: flat[at], style: flat[at + 1], rings: [], x0: Infinity, y0: Infinity, x1: -Infinity, y1: -Infinity };
    const count = flat[at + 2];
    at += 3;
    for (let k = 0; k < count; k++) {
      const ring = new Float64Array(2 * flat[at++]);
      let x = 0;
      let y = 0;
      for (let i = 0; i < ring.length; i += 2) {
        x += flat[at++];
        y += flat[at++];
        ring[i] = x;
        ring[i + 1] = y;
        if (x < shape.x0) shape.x0 = x;
        if (x > shape.x1) shape.x1 = x;
        if (y < shape.y0) shape.y0 = y;
        if (y > shape.y1) shape.y1 = y;
      }
      shape.rings.push(ring);
    }
    yield shape;
  }
}

/** Yield the discs of a layer's flat list: item, style, step of the middle, radius. */
function* circlesOf(flat) {
  let x = 0;
  let y = 0;
  for (let at = 0; at < flat.length; at += 5) {
    x += flat[at + 2];
    y += flat[at + 3];
    const r = flat[at + 4];
    yield { item: flat[at], style: flat[at + 1], rings: null, x, y, r, x0: x - r, y0: y - r, x1: x + r, y1: y + r };
  }
}

/** Return the box around shapes, null for none. */
function boxOf(shapes) {
  let box = null;
  for (const shape of shapes) {
    if (!box) box = { x0: shape.x0, y0: shape.y0, x1: shape.x1, y1: shape.y1 };
    box.x0 = Math.min(box.x0, shape.x0);
    box.y0 = Math.min(box.y0, shape.y0);
    box.x1 = Math.max(box.x1, shape.x1);
    box.y1 = Math.max(box.y1, shape.y1);
  }
  return box;
}

/** Return the shapes of an item and of the items that are pieces of it. */
function shapesOf(board, number) {
  const key = board.items[number].key;
  const wanted = new Set();
  board.items.forEach((item, k) => {
    if (k === number || item.parent === key) wanted.add(k);
  });
  return board.shapes.filter((shape) => wanted.has(shape.item) && board.layers[shape.layer].rank > 0);
}

/** Return the place to look at for an item: a box, or null where it has no place. */
function placeOf(board, key) {
  const mark = board.marks.find((m) => `finding:${m[0]}` === key);
  if (mark) return { x0: mark[2], y0: mark[3], x1: mark[2], y1: mark[3] };
  const keys = board.targets[key] || [key];
  return boxOf(keys.filter((k) => board.numbers.has(k)).flatMap((k) => shapesOf(board, board.numbers.get(k))));
}

/** Sort the shapes that can be pointed at into square cells; those that span many cells are kept apart. */
function gridOf(board) {
  const { x0, y0, x1, y1 } = board.extent;
  const across = Math.max(1, Math.min(256, Math.round(Math.sqrt(board.shapes.length / 2))));
  const cell = Math.max(x1 - x0, y1 - y0, 1) / across;
  const grid = { x0, y0, cell, across: across + 1, cells: new Map(), large: [] };
  for (const shape of board.shapes) {
    if (!board.layers[shape.layer].rank) continue;
    const [i0, j0, i1, j1] = cellsOf(grid, shape.x0, shape.y0, shape.x1, shape.y1);
    if ((i1 - i0 + 1) * (j1 - j0 + 1) > 32) {
      grid.large.push(shape);
      continue;
    }
    for (let j = j0; j <= j1; j++) {
      for (let i = i0; i <= i1; i++) {
        const number = j * grid.across + i;
        if (!grid.cells.has(number)) grid.cells.set(number, []);
        grid.cells.get(number).push(shape);
      }
    }
  }
  return grid;
}

function cellsOf(grid, x0, y0, x1, y1) {
  const number = (value) => Math.max(0, Math.min(grid.across - 1, Math.floor(value / grid.cell)));
  return [number(x0 - grid.x0), number(y0 - grid.y0), number(x1 - grid.x0), number(y1 - grid.y0)];
}

/** Return the shapes on layers switched on that may lie within a distance of a point. */
function near(board, x, y, distance) {
  board.grid ||= gridOf(board);
  const [i0, j0, i1, j1] = cellsOf(board.grid, x - distance, y - distance, x + distance, y + distance);
  const found = new Set(board.grid.large);
  for (let j = j0; j <= j1; j++) {
    for (let i = i0; i <= i1; i++) {
      for (const shape of board.grid.cells.get(j * board.grid.across + i) || []) found.add(shape);
    }
  }
  return [...found].filter(
    (s) => board.layers[s.layer].on && s.x0 <= x + distance && s.x1 >= x - distance && s.y0 <= y + distance && s.y1 >= y - distance,
  );
}

/** Return the topmost shape under a point, or null. */
function shapeAt(board, x, y) {
  let best = null;
  for (const shape of near(board, x, y, 0)) {
    if (best && !above(board, shape, best)) continue;
    if (contains(shape, x, y)) best = shape;
  }
  return best;
}

function above(board, a, b) {
  const ranks = board.layers[a.layer].rank - board.layers[b.layer].rank;
  return ranks > 0 || (ranks === 0 && a.order > b.order);
}

function contains(shape, x, y) {
  if (!shape.rings) return Math.hypot(x - shape.x, y - shape.y) <= shape.r;
  let inside = false;
  for (const ring of shape.rings) {
    for (let i = 0, j = ring.length - 2; i < ring.length; j = i, i += 2) {
      const up = ring[i + 1] > y;
      if (up === ring[j + 1] > y) continue;
      if (x < ring[i] + ((y - ring[i + 1]) / (ring[j + 1] - ring[i + 1])) * (ring[j] - ring[i])) inside = !inside;
    }
  }
  return inside;
}

/** Return the corner, middle of a disc, or else edge within a distance of a point; the point itself for none. */
function snapped(board, x, y, distance) {
  let corner = { x, y, kind: "free", d: distance };
  let edge = corner;
  const tryPoint = (px, py, kind) => {
    const d = Math.hypot(px - x, py - y);
    if (d < corner.d) corner = { x: px, y: py, kind, d };
  };
  for (const shape of near(board, x, y, distance)) {
    if (!shape.rings) {
      tryPoint(shape.x, shape.y, "middle");
      edge = nearerEdge(edge, onCircle(shape, x, y), x, y);
      continue;
    }
    for (const ring of shape.rings) {
      for (let i = 0, j = ring.length - 2; i < ring.length; j = i, i += 2) {
        tryPoint(ring[i], ring[i + 1], "corner");
        edge = nearerEdge(edge, onSegment(ring[j], ring[j + 1], ring[i], ring[i + 1], x, y), x, y);
      }
    }
  }
  return corner.kind === "free" ? edge : corner;
}

function nearerEdge(edge, point, x, y) {
  const d = Math.hypot(point[0] - x, point[1] - y);
  return d < edge.d ? { x: Math.round(point[0]), y: Math.round(point[1]), kind: "edge", d } : edge;
}

function onCircle(shape, x, y) {
  const d = Math.hypot(x - shape.x, y - shape.y) || 1;
  return [shape.x + ((x - shape.x) * shape.r) / d, shape.y + ((y - shape.y) * shape.r) / d];
}

function onSegment(ax, ay, bx, by, x, y) {
  const length = (bx - ax) ** 2 + (by - ay) ** 2 || 1;
  const t = Math.max(0, Math.min(1, ((x - ax) * (bx - ax) + (y - ay) * (by - ay)) / length));
  return [ax + t * (bx - ax), ay + t * (by - ay)];
}

/** Return nanometres as millimetres with three decimals. */
function millimetres(nm) {
  return (Math.abs(nm) < 500 ? 0 : nm / 1e6).toFixed(3).replace("-", "\u2212");
}
