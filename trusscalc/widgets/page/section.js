// The section line: drawn by dragging, pulled round joints by its points, moved by keys.

import { focusable } from "./elevation.js";
import { along, arrowhead, assign, cross, listed, make, simplified, unit } from "./svg.js";

const THICK_END = 13;
const VIEW = 22;
const CLOSES = 12;
const STRAIGHT = 4;
const FOLLOWS = 7;
const MOVES = { ArrowRight: [1, 0], ArrowLeft: [-1, 0], ArrowUp: [0, -1], ArrowDown: [0, 1] };

export class SectionLine {
  constructor(svg, layout) {
    this.layer = make("g", { class: "tc-section" }, svg);
    this.targets = make("g", { class: "tc-section-targets" }, svg);
    this.layout = layout;
    this.points = [];
    this.drawn = false;
  }

  /** Shows the line of a state, its handles only where it was drawn by hand. */
  show(line, layout) {
    this.layout = layout;
    this.line = line;
    this.drawn = Boolean(line?.drawn);
    this.closed = Boolean(line?.closed);
    this.points = (line?.points ?? []).map((point) => layout.toPage(point));
    this.redraw();
    this.redrawTargets();
  }

  /** Draws the line as it is now; cheap, as it runs with every move of the pointer. */
  redraw() {
    if (!this.path) {
      this.path = make("polyline", { class: "tc-line" }, this.layer);
      this.ends = make("path", { class: "tc-ends" }, this.layer);
      this.heads = make("path", { class: "tc-heads" }, this.layer);
      this.letters = [0, 1].map(() => make("text", { class: "tc-letter" }, this.layer));
    }
    const shown = this.points.length > 1;
    assign(this.layer, { visibility: shown ? "visible" : "hidden" });
    if (!shown) return;
    assign(this.path, { points: listed(this.closed ? [...this.points, this.points[0]] : this.points) });
    const views = this.closed ? [] : this.views();
    const thick = views.map(({ end, inward }) => `M ${listed([end])} L ${listed([along(end, inward, THICK_END)])}`);
    const shafts = views.flatMap(({ end, view }) =>
      view ? [`M ${listed([end])} L ${listed([along(end, view, VIEW - 9)])}`] : [],
    );
    assign(this.ends, { d: [...thick, ...shafts].join(" ") });
    assign(this.heads, {
      d: views.flatMap(({ end, view }) => (view ? [arrowhead(along(end, view, VIEW), view, 10)] : [])).join(" "),
    });
    this.letters.forEach((letter, index) => {
      const { end, view } = views[index] ?? {};
      letter.textContent = view ? (this.line?.letter ?? "") : "";
      if (view) {
        const [x, y] = along(end, view, this.drawn ? -17 : -10);
        assign(letter, { x, y });
      }
    });
  }

  /** Both ends with the way along the line and, once it is known, the way to the part kept. */
  views() {
    const count = this.points.length;
    const left = this.line?.keptLeft;
    return [
      [this.points[0], this.points[1], 1],
      [this.points[count - 1], this.points[count - 2], -1],
    ].map(([end, next, sign]) => {
      const inward = unit(end, next);
      const known = typeof left === "boolean" && !this.dragging;
      const turn = (left ? 1 : -1) * sign;
      return { end, inward, view: known ? [inward[1] * turn, -inward[0] * turn] : null };
    });
  }

  redrawTargets() {
    const focused = this.targets.contains(document.activeElement) ? document.activeElement.dataset : null;
    this.targets.replaceChildren();
    this.handles = [];
    if (this.points.length < 2) return;
    if (this.drawn) {
      const pieces = this.closed ? this.points.length : this.points.length - 1;
      for (let piece = 0; piece < pieces; piece += 1) {
        const ends = [this.points[piece], this.points[(piece + 1) % this.points.length]];
        make("polyline", { class: "tc-grip", points: listed(ends), "data-piece": piece }, this.targets);
      }
      for (const [index, point] of this.points.entries()) this.handle(point, index);
    }
    if (!this.closed) this.sideTargets();
    if (focused) this.focusAgain(focused);
  }

  handle([cx, cy], index) {
    const [x, y] = this.layout.toTruss([cx, cy]);
    const label = `Section point ${index + 1} of ${this.points.length}, at ${x}, ${y} ${this.layout.truss.length}`;
    const group = make("g", { ...focusable("tc-point"), "data-point": index, "aria-label": label }, this.targets);
    make("circle", { class: "tc-hit", cx, cy, r: 12 }, group);
    make("circle", { class: "tc-knob", cx, cy, r: 5 }, group);
    this.handles.push(group);
  }

  sideTargets() {
    for (const { end, view } of this.views()) {
      if (!view) continue;
      const [cx, cy] = along(end, view, VIEW);
      const label = "Kept part lies this way; press to keep the other part";
      const group = make("g", { ...focusable("tc-side"), "data-side": "", "aria-label": label }, this.targets);
      assign(group, { tabindex: 0 });
      make("circle", { class: "tc-hit", cx, cy, r: 12 }, group);
    }
  }

  focusAgain(data) {
    const again = "point" in data ? `[data-point="${data.point}"]` : "[data-side]";
    (this.targets.querySelector(again) ?? this.handles.at(-1))?.focus();
  }

  // --- dragging -------------------------------------------------------------------------------------------

  /** Begins a new line, which with `follows` keeps to the path of the pointer. */
  begin(spot, follows) {
    this.before = { line: this.line, points: this.points, drawn: this.drawn, closed: this.closed };
    this.dragging = { kind: follows ? "path" : "line" };
    Object.assign(this, { points: [spot, spot], drawn: true, closed: false, line: null });
    this.targets.replaceChildren();
  }

  /** Takes hold of a point, or of a piece, in which a corner then appears. */
  grip(data, spot) {
    const index = "point" in data ? Number(data.point) : Number(data.piece) + 1;
    this.before = { line: this.line, points: [...this.points], drawn: true, closed: this.closed };
    if ("piece" in data) this.points.splice(index, 0, spot);
    this.dragging = { kind: "point", index, fresh: "piece" in data };
  }

  move(spot) {
    const { kind, index } = this.dragging;
    if (kind === "point") this.points[index] = spot;
    else if (kind === "line") this.points[1] = spot;
    else if (Math.hypot(spot[0] - this.points.at(-1)[0], spot[1] - this.points.at(-1)[1]) > 3) this.points.push(spot);
    this.redraw();
  }

  /** Ends a drag: tidies the line up, and returns it in the truss's unit of length. */
  end() {
    const { kind, index, fresh } = this.dragging;
    this.dragging = null;
    if (kind === "path") this.points = simplified(this.points, FOLLOWS);
    const last = this.points.at(-1);
    if (
      kind !== "line" &&
      this.points.length > 3 &&
      Math.hypot(last[0] - this.points[0][0], last[1] - this.points[0][1]) < CLOSES
    ) {
      this.points.pop();
      this.closed = true;
    }
    if (kind === "point" && fresh && this.isStraightAt(index)) this.points.splice(index, 1);
    this.redraw();
    return this.inTruss();
  }

  isStraightAt(index) {
    const [before, at, after] = [-1, 0, 1].map(
      (step) => this.points[(index + step + this.points.length) % this.points.length],
    );
    const way = unit(before, after);
    return Math.abs((at[0] - before[0]) * way[1] - (at[1] - before[1]) * way[0]) < STRAIGHT;
  }

  /** Gives up a drag: the line is what it was. */
  cancel() {
    this.dragging = null;
    Object.assign(this, this.before);
    this.redraw();
    this.redrawTargets();
  }

  inTruss() {
    return { points: this.points.map((point) => this.layout.toTruss(point)), closed: this.closed };
  }

  /** Members the line meets on the page, for the preview while dragging. */
  meets(member) {
    const ends = this.layout.ends(member);
    return this.points.some((point, index) => index > 0 && cross([this.points[index - 1], point], ends));
  }

  // --- keys -----------------------------------------------------------------------------------------------

  /** Lays a straight line through the middle of a member: upright, or level where the member is upright. */
  through(member) {
    const [a, b] = this.layout.ends(member);
    const [x, y] = [(a[0] + b[0]) / 2, (a[1] + b[1]) / 2];
    const spots = this.layout.spots;
    const [xs, ys] = [spots.map((spot) => spot[0]), spots.map((spot) => spot[1])];
    const level = Math.abs(b[0] - a[0]) < 0.2 * Math.abs(b[1] - a[1]);
    this.points = level
      ? [
          [Math.min(...xs) - 40, y],
          [Math.max(...xs) + 40, y],
        ]
      : [
          [x, Math.max(...ys) + 40],
          [x, Math.min(...ys) - 40],
        ];
    Object.assign(this, { drawn: true, closed: false, line: null });
    this.redraw();
    return this.inTruss();
  }

  /** Moves, adds or takes away a point by a key; returns the line when it has changed. */
  key(index, event) {
    if (event.key in MOVES) {
      const step = event.shiftKey ? 25 : 5;
      this.points[index] = along(this.points[index], MOVES[event.key], step);
    } else if (event.key === "Insert" || event.key === "+") {
      const next = this.points[index + 1] ?? this.points[index - 1];
      const corner = [(this.points[index][0] + next[0]) / 2, (this.points[index][1] + next[1]) / 2];
      this.points.splice(index + (this.points[index + 1] ? 1 : 0), 0, corner);
    } else if (event.key === "Delete" && this.points.length > 2) {
      this.points.splice(index, 1);
    } else {
      return null;
    }
    this.line = null;
    this.redraw();
    this.redrawTargets();
    return this.inTruss();
  }
}
