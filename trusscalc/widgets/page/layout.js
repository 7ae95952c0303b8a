// Where everything lies on the page: one unit of the drawing is one pixel, y downwards.

const SIDE = 78;
const TOP = 84;
const HIGHEST = 460;
const NARROWEST = 300;

export class Layout {
  /** Lays a truss out in a width; a wide truss fills it, a high one fills the greatest height. */
  constructor(truss, width) {
    this.truss = truss;
    this.width = Math.max(NARROWEST, width);
    const xs = truss.joints.map(([, x]) => x);
    const ys = truss.joints.map(([, , y]) => y);
    [this.left, this.right] = [Math.min(...xs), Math.max(...xs)];
    [this.low, this.high] = [Math.min(...ys), Math.max(...ys)];
    const wide = this.right - this.left || 1;
    const tall = this.high - this.low || 1;
    this.scale = Math.min((this.width - 2 * SIDE) / wide, (HIGHEST - 2 * TOP) / tall);
    this.height = tall * this.scale + 2 * TOP;
    this.start = (this.width - wide * this.scale) / 2;
    this.places = Math.max(0, Math.ceil(Math.log10(this.scale)));
    this.spots = truss.joints.map(([, x, y]) => this.toPage([x, y]));
    this.middle = this.toPage([(this.left + this.right) / 2, (this.low + this.high) / 2]);
    this.ways = truss.joints.map(() => []);
    for (const [, a, b] of truss.members) {
      this.ways[a].push(this.angle(a, b));
      this.ways[b].push(this.angle(b, a));
    }
  }

  angle(a, b) {
    return Math.atan2(this.spots[b][1] - this.spots[a][1], this.spots[b][0] - this.spots[a][0]);
  }

  toPage([x, y]) {
    return [this.start + (x - this.left) * this.scale, TOP + (this.high - y) * this.scale];
  }

  /** A place on the page in the truss's unit of length, rounded to what a pixel tells. */
  toTruss([x, y]) {
    const round = (value) => Number(value.toFixed(this.places));
    return [round(this.left + (x - this.start) / this.scale), round(this.high - (y - TOP) / this.scale)];
  }

  ends(member) {
    return [this.spots[member[1]], this.spots[member[2]]];
  }

  /** Whether no member leaves a joint near a direction. */
  isFree(joint, angle, gap = 0.6) {
    return this.ways[joint].every((way) => Math.abs(Math.atan2(Math.sin(way - angle), Math.cos(way - angle))) > gap);
  }

  /** Marks a direction at a joint as taken, so that its name goes elsewhere. */
  take(joint, angle) {
    this.taken[joint].push(angle);
  }

  /** The middle of the widest gap between everything at a joint; of equal gaps the one away from the truss's middle. */
  gap(joint) {
    const ways = [...this.taken[joint]].sort((a, b) => a - b);
    const outward = Math.atan2(this.spots[joint][1] - this.middle[1], this.spots[joint][0] - this.middle[0]);
    let best = [-1, 0];
    ways.forEach((way, index) => {
      const next = index + 1 < ways.length ? ways[index + 1] : ways[0] + 2 * Math.PI;
      const middle = (way + next) / 2;
      const worth = Math.min(next - way, 2) + 0.2 * Math.cos(middle - outward);
      if (worth > best[0]) best = [worth, middle];
    });
    return best[1];
  }

  /** Forgets what was taken by loads and reactions. */
  begin() {
    this.taken = this.ways.map((ways) => [...ways]);
  }
}
