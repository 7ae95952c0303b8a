// The truss on the page: bars, joints, supports, loads, reactions and values, and what can be picked of them.

import { along, arrowhead, assign, listed, make, printed, unit } from "./svg.js";

const LAYERS = ["supports", "far", "bars", "cores", "rays", "joints", "marks", "words", "targets"];
const HALF_TARGET = 12;
const LOAD = 34;
const HEAD = 11;
const CROWDED = 26;
const LETTER = 6;
const CLEAR = 10;

/** The part of a truss drawing that is made anew only when the width changes; `show` then tells what the state is. */
export class Elevation {
  constructor(svg) {
    this.layers = Object.fromEntries(LAYERS.map((name) => [name, make("g", { class: `tc-${name}` }, svg)]));
    for (const name of LAYERS) if (name !== "targets") assign(this.layers[name], { "aria-hidden": "true" });
  }

  /** Draws a truss: everything that no choice changes. */
  draw(layout) {
    this.layout = layout;
    for (const layer of Object.values(this.layers)) layer.replaceChildren();
    const { truss } = layout;
    this.bars = truss.members.map((member) => this.bar(member));
    this.members = truss.members.map((member) => this.memberTarget(member));
    this.joints = truss.joints.map((joint, index) => this.jointTarget(joint, layout.spots[index]));
    this.circles = layout.spots.map(([cx, cy]) => make("circle", { cx, cy, r: 4 }, this.layers.joints));
    for (const support of truss.supports) this.support(support);
    const lengths = truss.members.map((member) => Math.hypot(...span(layout.ends(member)))).sort((a, b) => a - b);
    this.crowded = lengths[Math.floor(lengths.length / 2)] < CROWDED;
  }

  bar(member) {
    const [[x1, y1], [x2, y2]] = this.layout.ends(member);
    return ["bars", "cores"].map((layer) => make("line", { x1, y1, x2, y2 }, this.layers[layer]));
  }

  memberTarget(member) {
    const ends = this.layout.ends(member);
    const way = unit(...ends);
    const [a, b] = [along(ends[0], way, HALF_TARGET - 3), along(ends[1], way, 3 - HALF_TARGET)];
    const side = [-way[1], way[0]];
    const corners = [
      [a, 1],
      [b, 1],
      [b, -1],
      [a, -1],
    ].map(([end, sign]) => along(end, side, sign * HALF_TARGET));
    const group = make("g", { ...focusable("tc-member"), "data-member": member[0] }, this.layers.targets);
    make("polygon", { class: "tc-hit", points: listed(corners) }, group);
    return group;
  }

  jointTarget([name], [cx, cy]) {
    const group = make("g", { ...focusable("tc-joint"), "data-joint": name }, this.layers.targets);
    make("circle", { class: "tc-hit", cx, cy, r: HALF_TARGET }, group);
    return group;
  }

  support([joint, kind, links]) {
    const [x, y] = this.layout.spots[joint];
    const single = kind === "pin" ? [[0, 1]] : links;
    for (const [dx, dy] of single) {
      // the symbol hangs on the joint, on the side away from the truss where it can
      const angle = (Math.atan2(dx, dy) * 180) / Math.PI;
      const below = Math.cos((angle * Math.PI) / 180) >= 0 || Math.abs(dy) < 1e-9 ? angle : angle + 180;
      const symbol = make("g", { transform: `translate(${x} ${y}) rotate(${below.toFixed(2)})` }, this.layers.supports);
      make("path", { d: "M 0 4 L -9 19 L 9 19 Z" }, symbol);
      make("path", { d: kind === "pin" ? "M -14 19 H 14" : "M -14 23 H 14" }, symbol);
    }
  }

  /** Shows a state: senses, values, what is cut and kept, loads, reactions, the moment centre. */
  show(state) {
    const { truss } = this.layout;
    this.layout.begin();
    this.taken = [];
    for (const layer of ["marks", "words", "rays", "far"]) this.layers[layer].replaceChildren();
    const kept = new Set(state.kept);
    const cut = new Set(state.cut);
    const gone = (joint) => kept.size > 0 && !kept.has(truss.joints[joint][0]);
    truss.members.forEach((member, index) => {
      const classes = {
        "tc-checked": state.members.includes(member[0]),
        "tc-cut": cut.has(member[0]),
        "tc-gone": gone(member[1]) && gone(member[2]),
        "tc-solved": state.solved.includes(member[0]),
      };
      this.cutOff(member, this.bars[index], state.pulls[member[0]]);
      const sense = state.values[member[0]]?.[1];
      for (const line of this.bars[index]) mark(line, { ...classes, "tc-T": sense === "T", "tc-C": sense === "C" });
      assign(this.members[index], {
        "aria-pressed": classes["tc-checked"],
        "aria-label": this.memberWords(member, classes, state.values[member[0]]),
      });
    });
    truss.joints.forEach(([name], index) => {
      mark(this.circles[index], { "tc-gone": gone(index) });
      const centre = state.about?.joint === name;
      const words = [`Joint ${name}`, ...(kept.has(name) ? ["kept"] : []), ...(centre ? ["moment centre"] : [])];
      assign(this.joints[index], { "aria-pressed": kept.has(name), "aria-label": words.join(", ") });
    });
    for (const load of state.loads) this.load(load, gone(load[0]));
    for (const reaction of state.reactions) this.reaction(reaction);
    for (const [name, pull] of Object.entries(state.pulls)) this.pull(name, pull, state);
    if (state.about) this.about(state);
    this.names(gone);
    this.values(state);
  }

  /** Draws a member up to the section only, when it is cut; what is taken away of it, thin. */
  cutOff(member, lines, pull) {
    let [near, far] = this.layout.ends(member);
    if (pull) {
      const met = this.layout.toPage(pull);
      const ahead = (far[0] - near[0]) * pull[2] - (far[1] - near[1]) * pull[3];
      if (ahead < 0) [near, far] = [far, near];
      make("line", { x1: met[0], y1: met[1], x2: far[0], y2: far[1], class: "tc-gone" }, this.layers.far);
      far = met;
    }
    for (const line of lines) assign(line, { x1: near[0], y1: near[1], x2: far[0], y2: far[1] });
  }

  memberWords(member, classes, value) {
    const words = [`Member ${printed(member[0])}`];
    if (member[3]) words.push(member[3]);
    if (classes["tc-checked"]) words.push("to be checked");
    if (classes["tc-cut"]) words.push("cut");
    if (value) words.push(`${value[0]} ${this.layout.truss.force}`);
    return words.join(", ");
  }

  /** A load the way it acts: away from the joint where there is room that way, else coming to it. */
  load([joint, dx, dy, text], gone) {
    const way = [dx, -dy];
    const angle = Math.atan2(way[1], way[0]);
    const leaves = this.layout.isFree(joint, angle);
    const comes = this.layout.isFree(joint, angle + Math.PI);
    // along a chord there is room neither way: beside it
    const spot =
      leaves || comes
        ? this.layout.spots[joint]
        : along(this.layout.spots[joint], [-Math.abs(way[1]), Math.abs(way[0])], 9);
    const [tail, tip] = leaves
      ? [along(spot, way, 7), along(spot, way, 7 + LOAD)]
      : [along(spot, way, -7 - LOAD), along(spot, way, -7)];
    this.layout.take(joint, leaves ? angle : angle + Math.PI);
    this.arrow(tail, tip, `tc-load${gone ? " tc-gone" : ""}`);
    if (this.crowded) return;
    this.word(along(leaves ? tip : tail, way, leaves ? 10 : -10), text, `tc-amount${gone ? " tc-gone" : ""}`);
  }

  /** A reaction the way it is written, its head open, behind the support. */
  reaction([joint, dx, dy, text]) {
    const way = [dx, -dy];
    const spot = this.layout.spots[joint];
    const tip = along(spot, way, -27);
    const tail = along(spot, way, -27 - LOAD);
    this.layout.take(joint, Math.atan2(-way[1], -way[0]));
    this.arrow(tail, tip, "tc-reaction");
    const across = Math.abs(way[0]) > 0.7;
    this.word(across ? along(along(tail, way, 14), [0, -1], 11) : along(tail, way, -10), text, "tc-amount");
  }

  /** The force of a cut bar, drawn as a pull out of the body. */
  pull(name, [x, y, dx, dy], state) {
    const way = [dx, -dy];
    const start = this.layout.toPage([x, y]);
    const sought = state.solved.includes(name) ? " tc-sought" : "";
    this.arrow(along(start, way, 2), along(start, way, 30), `tc-pull${sought}`);
  }

  arrow(tail, tip, kind) {
    const way = unit(tail, tip);
    const group = make("g", { class: `tc-arrow ${kind}` }, this.layers.marks);
    const [x2, y2] = along(tip, way, -HEAD + 1);
    make("line", { x1: tail[0], y1: tail[1], x2, y2 }, group);
    make("path", { d: arrowhead(tip, way, HEAD) }, group);
  }

  word([x, y], text, kind, angle = 0) {
    this.taken.push(...samples([x, y], text, angle));
    const turned = angle ? { transform: `rotate(${angle.toFixed(1)} ${x.toFixed(1)} ${y.toFixed(1)})` } : {};
    make("text", { x, y, class: kind, ...turned }, this.layers.words).textContent = text;
  }

  /** The moment centre as a ring, with the lines that pass through it; or the direction summed along. */
  about({ about, dropped }) {
    if (about.sum === "force") {
      const way = unit([0, 0], [about.at[0], -about.at[1]]);
      const from = [this.layout.width - 60, 40];
      this.arrow(along(from, way, -18), along(from, way, 18), "tc-sum");
      this.word([from[0], from[1] + 32], "sum", "tc-name");
      return;
    }
    const [cx, cy] = this.layout.toPage(about.at);
    make("circle", { class: "tc-centre", cx, cy, r: 9 }, this.layers.marks);
    make("circle", { class: "tc-centre tc-dot", cx, cy, r: 3 }, this.layers.marks);
    for (const member of this.layout.truss.members) {
      if (!dropped.includes(member[0])) continue;
      const near = this.layout
        .ends(member)
        .sort((a, b) => Math.hypot(...span([a, [cx, cy]])) - Math.hypot(...span([b, [cx, cy]])));
      make("line", { x1: near[0][0], y1: near[0][1], x2: cx, y2: cy }, this.layers.rays);
    }
  }

  /** Values along their members: above in the middle, else where there is room. */
  values({ values }) {
    for (const member of this.layout.truss.members) {
      if (!(member[0] in values)) continue;
      const [a, b] = this.layout.ends(member);
      const way = a[0] <= b[0] ? unit(a, b) : unit(b, a);
      const upright = Math.abs(way[0]) < 0.02;
      const side = upright ? [-1, 0] : [way[1], -way[0]];
      const middle = [(a[0] + b[0]) / 2, (a[1] + b[1]) / 2];
      const angle = upright ? -90 : (Math.atan2(way[1], way[0]) * 180) / Math.PI;
      const text = values[member[0]][0];
      const reach = 0.15 * Math.hypot(...span([a, b]));
      const trials = [0, reach, -reach].flatMap((shift) =>
        [10, -11].map((apart) => along(along(middle, way, shift), side, apart)),
      );
      const free = trials.find((spot) => this.hasRoom(samples(spot, text, angle)));
      this.word(free ?? trials[0], text, "tc-value", angle);
    }
  }

  hasRoom(spots) {
    return spots.every(([x, y]) => this.taken.every(([u, v]) => Math.hypot(x - u, y - v) > CLEAR));
  }

  names(gone) {
    this.layout.truss.joints.forEach(([name], index) => {
      if (this.crowded) return;
      const angle = this.layout.gap(index);
      const reach = 12 + 3 * Math.abs(Math.cos(angle)) * Math.min(4, name.length);
      const spot = along(this.layout.spots[index], [Math.cos(angle), Math.sin(angle)], reach);
      this.word(spot, name, `tc-name${gone(index) ? " tc-gone" : ""}`);
    });
  }
}

/** Points along a word, close enough to stand for it when another one looks for room. */
function samples(spot, text, angle) {
  const half = (text.length * LETTER) / 2;
  const way = [Math.cos((angle * Math.PI) / 180), Math.sin((angle * Math.PI) / 180)];
  const count = Math.max(1, Math.ceil((2 * half) / LETTER));
  return Array.from({ length: count + 1 }, (_, index) => along(spot, way, -half + (2 * half * index) / count));
}

function span([a, b]) {
  return [b[0] - a[0], b[1] - a[1]];
}

function mark(node, classes) {
  for (const [name, on] of Object.entries(classes)) node.classList.toggle(name, on);
}

/** What every target has: a role, and the notebook's one-key commands kept away while it has the focus. */
export function focusable(kind) {
  return { class: kind, role: "button", tabindex: -1, "data-lm-suppress-shortcuts": "true" };
}
