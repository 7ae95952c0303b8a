// A train dragged along its chain over the influence line. The page follows the pointer at once, from ordinates sent
// once; every force that is told comes from Python.

import { Layout } from "./layout.js";
import { arrowhead, assign, html, listed, make, printed, viewName } from "./svg.js";

const LINE_HEIGHT = 150;
const LINE_GAP = 46;
const AXLE = 36;
const SNAP = 6;
const HALF_GRIP = 16;
const HASTE = 60;
const LATE = 700;
const CUT_OFF =
  "Not connected: the kernel has stopped or was started again. Nothing here is current; run this cell again.";
const HELP = [
  ["Drag", "the train along its chain; near a joint an axle comes to stand exactly over it"],
  ["Arrow keys", "one step, with Shift ten"],
  ["PageUp, PageDown", "to the next place where an axle stands over a joint"],
  ["Home, End", "leading axle over the first or the last joint"],
  ["L, S", "to the largest or the smallest force"],
  ["T", "turn the train"],
];

class TrainView {
  constructor(model, root) {
    this.model = model;
    this.root = root;
    root.classList.add("tc-drawing", "tc-train");
    this.view = viewName();
    this.number = 0;
    html("p", { class: "tc-lost" }, root, CUT_OFF);
    this.problem = html("p", { class: "tc-problem", role: "alert" }, root);
    this.svg = make("svg", { role: "group", class: "tc-sheet" }, root);
    this.status = html("p", { class: "tc-status", role: "status" }, root);
    this.help();
    this.watch = new ResizeObserver(() => this.resize());
    this.watch.observe(root);
    this.listen();
    this.resize(true);
  }

  help() {
    const details = html("details", { class: "tc-help" }, this.root);
    html("summary", {}, details, "Pointer and keys");
    const list = html("dl", {}, details);
    for (const [key, does] of HELP) {
      html("dt", {}, list, key);
      html("dd", {}, list, does);
    }
  }

  // --- drawing once ---------------------------------------------------------------------------------------

  resize(first = false) {
    const width = Math.round(this.root.clientWidth || 720);
    if (!first && width === this.layout.width) return;
    this.layout = new Layout(this.model.get("truss"), width);
    this.line = this.model.get("line");
    this.height = this.layout.height + LINE_HEIGHT + LINE_GAP;
    assign(this.svg, {
      viewBox: `0 0 ${this.layout.width} ${this.height}`,
      width: this.layout.width,
      height: this.height,
    });
    assign(this.svg, { "aria-label": `Influence line of ${this.line.words}, with a train` });
    this.svg.replaceChildren();
    this.drawTruss();
    this.drawLine();
    this.moving = make("g", { class: "tc-moving" }, this.svg);
    const name = { role: "slider", tabindex: 0, "aria-label": "Leading axle", "data-lm-suppress-shortcuts": "true" };
    this.grip = make("g", { class: "tc-grip-train", ...name }, this.svg);
    this.hold = make("rect", { class: "tc-hit" }, this.grip);
    this.show();
  }

  drawTruss() {
    const { truss, spots } = this.layout;
    const chain = new Set(this.line.members);
    const bars = make("g", { class: "tc-bars", "aria-hidden": "true" }, this.svg);
    for (const member of truss.members) {
      const [[x1, y1], [x2, y2]] = this.layout.ends(member);
      const kind = member[0] === this.line.target ? "tc-checked" : chain.has(member[0]) ? "tc-path" : "tc-gone";
      make("line", { x1, y1, x2, y2, class: kind }, bars);
    }
    const joints = make("g", { class: "tc-joints", "aria-hidden": "true" }, this.svg);
    this.words = make("g", { class: "tc-words", "aria-hidden": "true" }, this.svg);
    spots.forEach(([cx, cy], index) => {
      const on = this.line.joints.includes(index);
      make("circle", { cx, cy, r: 3, class: on ? "tc-on-path" : "tc-gone" }, joints);
    });
    this.path = this.line.joints.map((joint) => spots[joint]);
    const middle = this.path.reduce((sum, [, y]) => sum + y, 0) / this.path.length;
    this.hangs = middle > this.layout.middle[1] - 1;
    this.target();
  }

  /** Names the member the line is of, at its middle. */
  target() {
    const member = this.layout.truss.members.find(([name]) => name === this.line.target);
    if (!member) return;
    const [a, b] = this.layout.ends(member);
    this.word([(a[0] + b[0]) / 2, (a[1] + b[1]) / 2 - 12], printed(member[0]), "tc-value");
  }

  drawLine() {
    const { ordinates, texts, letters } = this.line;
    const [top, bottom] = [Math.max(...ordinates, 0), Math.min(...ordinates, 0)];
    this.rise = LINE_HEIGHT / (top - bottom || 1);
    this.base = this.layout.height + LINE_GAP / 2 + top * this.rise;
    const plot = make("g", { class: "tc-plot", "aria-hidden": "true" }, this.svg);
    const points = ordinates.map((ordinate, index) => [this.path[index][0], this.base - ordinate * this.rise]);
    const ends = [this.path[0][0], this.path.at(-1)[0]];
    make("line", { class: "tc-base", x1: ends[0], x2: ends[1], y1: this.base, y2: this.base }, plot);
    points.forEach(([x, y], index) => {
      make("line", { class: "tc-ordinate", x1: x, x2: x, y1: this.base, y2: y }, plot);
      const above = ordinates[index] >= 0;
      if (texts[index]) this.word([x, y + (above ? -9 : 10)], texts[index], "tc-amount");
    });
    make("polyline", { class: "tc-influence", points: listed(points) }, plot);
    if (top > 0 && letters[0]) this.word([Math.min(...ends) - 20, this.base - 12], letters[0], "tc-value");
    if (bottom < 0 && letters[1]) this.word([Math.min(...ends) - 20, this.base + 14], letters[1], "tc-value");
  }

  word([x, y], text, kind) {
    make("text", { x, y, class: kind }, this.words).textContent = text;
  }

  // --- where things are -----------------------------------------------------------------------------------

  /** The place on the page of a position along the chain; beyond its ends it goes on level. */
  spot(position) {
    const { positions } = this.line;
    const last = positions.length - 1;
    let piece = positions.findIndex(
      (start, index) => index < last && position < positions[index + 1] && position >= start,
    );
    if (piece < 0) piece = position < positions[0] ? 0 : last - 1;
    const [from, to] = [this.path[piece], this.path[piece + 1]];
    const part = (position - positions[piece]) / (positions[piece + 1] - positions[piece]);
    const inside = Math.min(1, Math.max(0, part));
    return [from[0] + (to[0] - from[0]) * part, from[1] + (to[1] - from[1]) * inside];
  }

  ordinate(position) {
    const { positions, ordinates } = this.line;
    const last = positions.length - 1;
    if (position < positions[0] || position > positions[last]) return null;
    const piece = Math.min(last - 1, Math.max(0, positions.findIndex((start) => start > position) - 1));
    const at = position >= positions[last] ? last - 1 : piece;
    const part = (position - positions[at]) / (positions[at + 1] - positions[at]);
    return ordinates[at] + (ordinates[at + 1] - ordinates[at]) * part;
  }

  // --- drawing with every move ----------------------------------------------------------------------------

  /** Shows the state as Python tells it; while the pointer holds the train, only what is said of it. */
  show() {
    const state = this.model.get("state");
    this.state = state;
    this.asked = false;
    clearTimeout(this.late);
    if (!this.held && !this.next) {
      this.lead = state.lead;
      this.redraw(state.patches);
      this.root.classList.remove("tc-waiting");
    } else if (this.next) this.ask();
    this.say(this.problem, state.problem);
    this.say(this.status, state.status);
    assign(this.grip, {
      "aria-valuemin": state.from,
      "aria-valuemax": state.to,
      "aria-valuenow": state.lead,
      "aria-valuetext": state.status,
    });
  }

  /** Draws the train with its leading axle at the place held. */
  redraw(patches) {
    this.moving.replaceChildren();
    const { state } = this;
    for (const [start, stop] of patches ?? []) this.patch(start, stop);
    const spots = state.offsets.map((offset) => this.spot(this.lead + offset));
    for (const [index, spot] of spots.entries()) this.axle(spot, index);
    const xs = spots.map(([x]) => x);
    const ys = spots.map(([, y]) => y);
    const [left, right] = [Math.min(...xs) - HALF_GRIP, Math.max(...xs) + HALF_GRIP];
    const [high, low] = this.hangs
      ? [Math.min(...ys) - 8, Math.max(...ys) + AXLE + 22]
      : [Math.min(...ys) - AXLE - 22, Math.max(...ys) + 8];
    assign(this.hold, { x: left, y: high, width: right - left, height: low - high });
  }

  axle([x, y], index) {
    const position = this.lead + this.state.offsets[index];
    const height = this.ordinate(position);
    const kind = height === null ? "tc-axle tc-gone" : "tc-axle";
    const group = make("g", { class: kind }, this.moving);
    const [tail, tip] = this.hangs ? [y + 4, y + 4 + AXLE] : [y - 4 - AXLE, y - 4];
    make("line", { x1: x, x2: x, y1: tail, y2: tip - 9 }, group);
    make("path", { d: arrowhead([x, tip], [0, 1], 10) }, group);
    const text = make("text", { x, y: this.hangs ? tip + 9 : tail - 9 }, group);
    text.textContent = this.state.loads[index];
    if (height === null) return;
    const end = this.base - height * this.rise;
    make("line", { class: "tc-under", x1: x, x2: x, y1: this.base, y2: end }, group);
    make("circle", { class: "tc-mark", cx: x, cy: end, r: 3.2 }, group);
  }

  patch(start, stop) {
    const [from, to] = [this.spot(start), this.spot(stop)];
    const y = this.hangs ? Math.max(from[1], to[1]) + 5 : Math.min(from[1], to[1]) - 13;
    const x = Math.min(from[0], to[0]);
    make("rect", { class: "tc-patch", x, y, width: Math.abs(to[0] - from[0]), height: 8 }, this.moving);
  }

  say(node, text) {
    if (node.textContent !== text) node.textContent = text;
    node.hidden = !text;
  }

  // --- telling --------------------------------------------------------------------------------------------

  tell(event, content = {}) {
    this.next = null;
    this.asked = true;
    this.root.classList.add("tc-waiting");
    clearTimeout(this.late);
    this.late = setTimeout(() => {
      this.root.classList.remove("tc-waiting");
      this.say(this.status, "Waiting for the answer from Python.");
    }, LATE);
    this.number += 1;
    this.model.send({ event, view: this.view, number: this.number, ...content });
  }

  /** Asks what a place gives; while an answer is awaited, only the last place is remembered. */
  ask() {
    const at = Number(this.lead.toFixed(this.layout.places));
    this.tell("place", { at });
  }

  askSoon() {
    this.next = true;
    this.root.classList.add("tc-waiting");
    clearTimeout(this.soon);
    this.soon = setTimeout(() => this.next && !this.asked && this.ask(), HASTE);
  }

  listen() {
    const { svg } = this;
    svg.addEventListener("pointerdown", (event) => this.down(event));
    svg.addEventListener("pointermove", (event) => this.held && this.move(event));
    svg.addEventListener("pointerup", (event) => this.held && this.up(event));
    svg.addEventListener("pointercancel", () => this.drop());
    svg.addEventListener("keydown", (event) => this.key(event));
  }

  /** How far along the chain a pixel to the right goes: less than nothing where the chain runs to the left. */
  perPixel() {
    const { positions } = this.line;
    return (positions.at(-1) - positions[0]) / (this.path.at(-1)[0] - this.path[0][0]);
  }

  down(event) {
    if (event.button !== 0 || !event.target.closest(".tc-grip-train")) return;
    this.held = {
      x: event.clientX,
      lead: this.lead,
      scale: this.layout.width / this.svg.getBoundingClientRect().width,
    };
    this.svg.setPointerCapture(event.pointerId);
  }

  move(event) {
    const { x, lead, scale } = this.held;
    const far = lead + (event.clientX - x) * scale * this.perPixel();
    this.lead = Math.min(this.state.to, Math.max(this.state.from, far));
    this.snap = this.near();
    if (this.snap) this.lead = this.line.positions[this.snap.joint] - this.state.offsets[this.snap.axle];
    this.redraw();
    this.askSoon();
  }

  /** The axle and the joint that stand nearly over each other, if any do. */
  near() {
    const slack = Math.abs(this.perPixel()) * SNAP;
    let [best, least] = [null, slack];
    this.state.offsets.forEach((offset, axle) => {
      this.line.positions.forEach((position, joint) => {
        const apart = Math.abs(this.lead + offset - position);
        if (apart < least) [best, least] = [{ axle, joint }, apart];
      });
    });
    return best;
  }

  up() {
    const moved = this.next || this.asked;
    this.held = null;
    clearTimeout(this.soon);
    if (this.snap) this.tell("over", this.snap);
    else if (moved) this.ask();
    else this.show();
    this.snap = null;
  }

  drop() {
    this.held = null;
    this.next = null;
    this.show();
  }

  key(event) {
    if (event.key === "Tab" || event.ctrlKey || event.metaKey || event.altKey) return;
    // the notebook's own one-key commands must not act on the cell
    event.stopPropagation();
    const step = (event.shiftKey ? 10 : 1) * this.state.step;
    const way = { ArrowRight: 1, ArrowUp: 1, ArrowLeft: -1, ArrowDown: -1 }[event.key];
    const page = { PageUp: 1, PageDown: -1 }[event.key];
    const name = event.key.length === 1 ? event.key.toLowerCase() : event.key;
    const asked = { l: "largest", s: "least", t: "turn" }[name];
    if (way) this.go(this.lead + way * step);
    else if (page) this.goOver(page);
    else if (name === "Home") this.tell("over", { axle: 0, joint: 0 });
    else if (name === "End") this.tell("over", { axle: 0, joint: this.line.positions.length - 1 });
    else if (asked) this.tell(asked);
    else return;
    event.preventDefault();
  }

  go(lead) {
    this.lead = Math.min(this.state.to, Math.max(this.state.from, lead));
    this.redraw();
    this.askSoon();
  }

  /** To the next place, either way, where an axle stands over a joint. */
  goOver(way) {
    let [best, least] = [null, Number.POSITIVE_INFINITY];
    this.state.offsets.forEach((offset, axle) => {
      this.line.positions.forEach((position, joint) => {
        const apart = (position - offset - this.lead) * way;
        if (apart > 1e-9 * this.state.to && apart < least) [best, least] = [{ axle, joint }, apart];
      });
    });
    if (best) this.tell("over", best);
  }

  lose() {
    this.root.classList.add("tc-cut-off");
    this.say(this.problem, CUT_OFF);
    this.say(this.status, "");
  }

  remove() {
    this.watch.disconnect();
    clearTimeout(this.late);
    clearTimeout(this.soon);
  }
}

function render({ model, el }) {
  const view = new TrainView(model, el);
  const show = () => view.show();
  const live = () => model.comm_live === false && view.lose();
  model.on("change:state", show);
  model.on("comm_live_update", live);
  model.send({ event: "shown" });
  return () => {
    model.off("change:state", show);
    model.off("comm_live_update", live);
    view.remove();
  };
}

export default { render };
