// Making and changing SVG and HTML nodes, and the few bits of plane geometry that drawing and dragging need.

const SVG = "http://www.w3.org/2000/svg";

/** Sets attributes; null takes one away. */
export function assign(node, attributes) {
  for (const [name, value] of Object.entries(attributes)) {
    if (value === null) node.removeAttribute(name);
    else node.setAttribute(name, value);
  }
  return node;
}

/** Makes an SVG node inside a parent. */
export function make(tag, attributes, parent) {
  const node = assign(document.createElementNS(SVG, tag), attributes);
  parent?.append(node);
  return node;
}

/** Makes an HTML node inside a parent, with text. */
export function html(tag, attributes, parent, text = "") {
  const node = assign(document.createElement(tag), attributes);
  node.textContent = text;
  parent?.append(node);
  return node;
}

/** A member's name as it is printed. */
export function printed(name) {
  return name.replace("-", "–");
}

/** Points as an SVG attribute. */
export function listed(points) {
  return points.map(([x, y]) => `${x.toFixed(2)},${y.toFixed(2)}`).join(" ");
}

/** The unit vector from a to b. */
export function unit(a, b) {
  const length = Math.hypot(b[0] - a[0], b[1] - a[1]) || 1;
  return [(b[0] - a[0]) / length, (b[1] - a[1]) / length];
}

/** The point at a distance from a start along a direction. */
export function along(start, way, distance) {
  return [start[0] + way[0] * distance, start[1] + way[1] * distance];
}

/** Whether two pieces cross; for the preview while dragging only, what counts is decided in Python. */
export function cross([p, q], [r, s]) {
  const turn = (a, b, c) => (b[0] - a[0]) * (c[1] - a[1]) - (b[1] - a[1]) * (c[0] - a[0]);
  return turn(p, q, r) * turn(p, q, s) < 0 && turn(r, s, p) * turn(r, s, q) < 0;
}

/** A filled arrowhead as a path, its tip at a point. */
export function arrowhead(tip, way, size) {
  const back = along(tip, way, -size);
  const half = size * 0.29;
  const left = [back[0] - way[1] * half, back[1] + way[0] * half];
  const right = [back[0] + way[1] * half, back[1] - way[0] * half];
  return `M ${listed([left])} L ${listed([tip])} L ${listed([right])} Z`;
}

/** A bent line with the corners that matter: none of the points left out lies farther than a slack from it. */
export function simplified(points, slack) {
  if (points.length < 3) return points;
  const [first, last] = [points[0], points[points.length - 1]];
  const way = unit(first, last);
  let [worst, place] = [0, 0];
  points.forEach((point, index) => {
    const apart = Math.abs((point[0] - first[0]) * way[1] - (point[1] - first[1]) * way[0]);
    if (apart > worst) [worst, place] = [apart, index];
  });
  if (worst <= slack) return [first, last];
  return [...simplified(points.slice(0, place + 1), slack), ...simplified(points.slice(place), slack).slice(1)];
}

/** A name for a view, told with everything it sends, so that of its messages the last counts. */
export function viewName() {
  return `${Date.now().toString(36)}-${Math.random().toString(36).slice(2)}`;
}
