// The drawing in the notebook: it draws what Python tells it, and reports what pointer and keys did. Nothing is
// computed here that anyone reads as a result.

import { Elevation } from "./elevation.js";
import { Layout } from "./layout.js";
import { Roving } from "./roving.js";
import { SectionLine } from "./section.js";
import { html, make, viewName } from "./svg.js";

const STARTS = 5;
const QUIET = 250;
const PATIENCE = 700;
const KEYS = [
  ["Tab", "from members to joints, to the points of the section line, to the arrows that show the part kept"],
  ["Arrow keys", "to the next member or joint that way; on a point of the section line: move it, with Shift farther"],
  ["PageDown, PageUp, Home, End", "through all members or joints in their order"],
  ["Space or Enter", "a member: check it or not; a joint: as chosen above; an arrow: keep the other part"],
  ["S", "on a member: a straight section through it"],
  ["C", "on a member: cut through it or not"],
  ["K", "on a joint: keep it or not; the cut goes round the joints kept"],
  ["M", "on a joint: moments about it"],
  ["Insert or +, Delete", "on a point of the section line: one more corner, one less"],
  ["O", "keep the other part"],
  ["N", "take the nearest cut that gives something"],
  ["Escape", "no cut; while dragging: as it was"],
];
const DRAGS = [
  ["line", "a straight section"],
  ["path", "a section along the pointer's path"],
];
const PICKS = [
  ["centre", "takes moments about it"],
  ["keep", "keeps it in the free body, or not"],
];
let count = 0;

class Drawing {
  constructor(model, root) {
    this.model = model;
    this.root = root;
    count += 1;
    this.id = `tc-${count}`;
    this.view = viewName();
    this.number = 0;
    root.classList.add("tc-drawing");
    html("p", { class: "tc-lost" }, root, LOST);
    this.problem = html("p", { class: "tc-problem", role: "alert" }, root);
    this.svg = make(
      "svg",
      { role: "group", tabindex: -1, "aria-describedby": `${this.id}-keys`, class: "tc-sheet" },
      root,
    );
    this.elevation = new Elevation(this.svg);
    this.note = html("p", { class: "tc-note" }, root, NO_ROOM);
    this.status = html("p", { class: "tc-status", role: "status" }, root);
    this.drags = this.choiceOf("drags", "Dragging draws", DRAGS);
    this.picks = this.choiceOf("picks", "Picking a joint", PICKS);
    this.help();
    this.walks = { member: new Roving(), joint: new Roving(), point: new Roving() };
    this.listen();
    this.watch = new ResizeObserver(() => this.resize());
    this.watch.observe(root);
    this.resize(true);
  }

  /** A set of radio buttons; returns what asks which is chosen. */
  choiceOf(name, title, options) {
    const set = html("fieldset", { class: "tc-picking" }, this.root);
    html("legend", {}, set, title);
    const inputs = options.map(([value, text], index) => {
      const label = html("label", {}, set);
      const input = html("input", { type: "radio", name: `${this.id}-${name}`, value }, label);
      input.checked = index === 0;
      label.append(text);
      return input;
    });
    return () => inputs.find((input) => input.checked).value;
  }

  help() {
    const details = html("details", { class: "tc-help" }, this.root);
    html("summary", {}, details, "Pointer and keys");
    const text =
      "Drag across members to draw a section. Pull the line, or one of its points, to lead it round a joint. " +
      "Click a member to have it checked.";
    html("p", { id: `${this.id}-keys` }, details, text);
    const list = html("dl", {}, details);
    for (const [key, does] of KEYS) {
      html("dt", {}, list, key);
      html("dd", {}, list, does);
    }
  }

  // --- showing --------------------------------------------------------------------------------------------

  resize(first = false) {
    const width = Math.round(this.root.clientWidth || 720);
    if (!first && width === this.layout.width) return;
    this.layout = new Layout(this.model.get("truss"), width);
    const { width: wide, height } = this.layout;
    this.svg.setAttribute("viewBox", `0 0 ${wide} ${height}`);
    this.svg.setAttribute("width", wide);
    this.svg.setAttribute("height", height);
    const title = this.model.get("truss").title || "Truss";
    this.svg.setAttribute("aria-label", `${title}, elevation`);
    this.elevation.draw(this.layout);
    this.note.hidden = !this.elevation.crowded;
    this.section ??= new SectionLine(this.svg, this.layout);
    this.walks.member.take(this.elevation.members, this.middles());
    this.walks.joint.take(this.elevation.joints, this.layout.spots);
    this.show();
  }

  middles() {
    return this.layout.truss.members.map((member) => {
      const [a, b] = this.layout.ends(member);
      return [(a[0] + b[0]) / 2, (a[1] + b[1]) / 2];
    });
  }

  /** Shows the state as Python tells it. */
  show() {
    const state = this.model.get("state");
    clearTimeout(this.patience);
    this.root.classList.remove("tc-waiting");
    this.elevation.show(state);
    if (!this.section.dragging) {
      this.section.show(state.line, this.layout);
      this.walks.point.take(this.section.handles, this.section.points);
      this.preview(false);
    }
    say(this.problem, state.problem);
    say(this.status, state.status);
  }

  preview(on) {
    this.layout.truss.members.forEach((member, index) => {
      this.elevation.members[index].classList.toggle("tc-met", on && this.section.meets(member));
    });
  }

  // --- telling --------------------------------------------------------------------------------------------

  tell(event, content = {}) {
    clearTimeout(this.quiet);
    this.root.classList.add("tc-waiting");
    clearTimeout(this.patience);
    this.patience = setTimeout(() => say(this.status, "Waiting for the answer from Python."), PATIENCE);
    this.number += 1;
    this.model.send({ event, view: this.view, number: this.number, ...content });
  }

  /** Tells of a line moved by keys once the keys are quiet. */
  tellSoon(line) {
    clearTimeout(this.quiet);
    this.root.classList.add("tc-waiting");
    this.quiet = setTimeout(() => this.tell("section", line), QUIET);
  }

  pick(target) {
    const { member, joint, side } = target.dataset;
    if (member !== undefined) this.tell("member", { member });
    else if (joint !== undefined) this.tell(this.picks(), { joint });
    else if (side !== undefined) this.tell("side");
  }

  // --- listening ------------------------------------------------------------------------------------------

  listen() {
    const { svg } = this;
    svg.addEventListener("pointerdown", (event) => this.down(event));
    svg.addEventListener("pointermove", (event) => this.move(event));
    svg.addEventListener("pointerup", (event) => this.up(event));
    svg.addEventListener("pointercancel", () => this.cancel());
    svg.addEventListener("keydown", (event) => this.key(event));
    svg.addEventListener("focusin", (event) => {
      for (const walk of Object.values(this.walks)) walk.follow(event.target);
    });
  }

  spot(event) {
    const box = this.svg.getBoundingClientRect();
    const scale = this.layout.width / box.width;
    return [(event.clientX - box.left) * scale, (event.clientY - box.top) * scale];
  }

  down(event) {
    if (event.button !== 0 || this.press) return;
    const target = event.target.closest("[data-member], [data-joint], [data-point], [data-piece], [data-side]");
    this.press = { spot: this.spot(event), target, follows: this.drags() === "path", id: event.pointerId };
  }

  move(event) {
    if (!this.press || event.pointerId !== this.press.id) return;
    const spot = this.spot(event);
    if (!this.section.dragging) {
      const [x, y] = this.press.spot;
      if (Math.hypot(spot[0] - x, spot[1] - y) < STARTS) return;
      this.svg.setPointerCapture(event.pointerId);
      const { point, piece } = this.press.target?.dataset ?? {};
      if (point ?? piece) this.section.grip(this.press.target.dataset, spot);
      else this.section.begin(this.press.spot, this.press.follows);
      this.root.classList.add("tc-waiting");
    }
    this.section.move(spot);
    this.preview(true);
  }

  up(event) {
    const { press } = this;
    if (!press || event.pointerId !== press.id) return;
    this.press = null;
    if (this.section.dragging) this.tell("section", this.section.end());
    else if (press.target) this.pick(press.target);
  }

  cancel() {
    this.press = null;
    if (!this.section.dragging) return;
    this.section.cancel();
    this.preview(false);
    this.root.classList.remove("tc-waiting");
  }

  key(event) {
    if (event.key === "Tab" || event.ctrlKey || event.metaKey || event.altKey) return;
    // the notebook's own one-key commands would cut or insert cells while a member has the focus
    event.stopPropagation();
    if (event.key === "Escape" && this.press) this.cancel();
    else if (!this.does(event)) return;
    event.preventDefault();
  }

  /** Does what a key means where the focus is; returns whether it means anything. */
  does(event) {
    const target = event.target.closest("[data-member], [data-joint], [data-point], [data-side]");
    const name = event.key.length === 1 ? event.key.toLowerCase() : event.key;
    const anywhere = { Escape: "clear", o: "side", n: "nearest" }[name];
    if (anywhere) this.tell(anywhere);
    if (anywhere || !target) return Boolean(anywhere);
    const { member, joint, point } = target.dataset;
    if (point !== undefined) {
      const line = this.section.key(Number(point), event);
      if (line) {
        this.walks.point.take(this.section.handles, this.section.points);
        this.tellSoon(line);
        return true;
      }
    }
    const kind = member !== undefined ? "member" : joint !== undefined ? "joint" : "point";
    if (point === undefined && this.walks[kind].key(event.key)) return true;
    if (name === " " || name === "Enter") this.pick(target);
    else if (name === "s" && member !== undefined) this.tell("section", this.section.through(this.member(member)));
    else if (name === "c" && member !== undefined) this.tell("through", { member });
    else if (name === "k" && joint !== undefined) this.tell("keep", { joint });
    else if (name === "m" && joint !== undefined) this.tell("centre", { joint });
    else return false;
    return true;
  }

  member(name) {
    return this.layout.truss.members.find((member) => member[0] === name);
  }

  /** Says that nothing here is current any more. */
  lose() {
    this.root.classList.add("tc-cut-off");
    say(this.problem, LOST);
    say(this.status, "");
  }

  remove() {
    this.watch.disconnect();
    clearTimeout(this.patience);
    clearTimeout(this.quiet);
  }
}

const LOST =
  "Not connected: the kernel has stopped or was started again. Nothing here is current; run this cell again.";

const NO_ROOM = "At this width there is no room for the names of joints and the sizes of loads.";

/** Sets the text of a live region only when it changes, so that it is spoken once. */
function say(node, text) {
  if (node.textContent !== text) node.textContent = text;
  node.hidden = !text;
}

function render({ model, el }) {
  const drawing = new Drawing(model, el);
  const show = () => drawing.show();
  const live = () => model.comm_live === false && drawing.lose();
  model.on("change:state", show);
  model.on("comm_live_update", live);
  model.send({ event: "shown" });
  return () => {
    model.off("change:state", show);
    model.off("comm_live_update", live);
    drawing.remove();
  };
}

export default { render };
