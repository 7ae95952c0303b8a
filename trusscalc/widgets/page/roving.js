// One Tab stop for a set of targets: arrow keys go to the nearest one that way, PageDown and PageUp through the list.

const WAYS = { ArrowRight: [1, 0], ArrowLeft: [-1, 0], ArrowUp: [0, -1], ArrowDown: [0, 1] };

function nearestThatWay(spots, from, way) {
  let [best, least] = [from, Number.POSITIVE_INFINITY];
  spots.forEach(([x, y], index) => {
    const [dx, dy] = [x - spots[from][0], y - spots[from][1]];
    const ahead = dx * way[0] + dy * way[1];
    const aside = Math.abs(dx * way[1] - dy * way[0]);
    if (ahead > 0.5 && aside <= 2 * ahead && ahead + 2 * aside < least) [best, least] = [index, ahead + 2 * aside];
  });
  return best;
}

export class Roving {
  constructor() {
    this.nodes = [];
    this.spots = [];
    this.at = 0;
  }

  /** Takes over targets and where they lie; the one that had the Tab stop keeps it. */
  take(nodes, spots) {
    [this.nodes, this.spots] = [nodes, spots];
    this.at = Math.max(0, Math.min(this.at, nodes.length - 1));
    for (const node of nodes) node.setAttribute("tabindex", -1);
    nodes[this.at]?.setAttribute("tabindex", 0);
  }

  /** Moves the Tab stop to a target, and the focus with it. */
  go(index) {
    this.nodes[this.at]?.setAttribute("tabindex", -1);
    this.at = index;
    this.nodes[index].setAttribute("tabindex", 0);
    this.nodes[index].focus();
  }

  /** Follows the focus wherever a click has put it. */
  follow(node) {
    const index = this.nodes.indexOf(node);
    if (index >= 0 && index !== this.at) {
      this.nodes[this.at]?.setAttribute("tabindex", -1);
      this.at = index;
      node.setAttribute("tabindex", 0);
    }
  }

  /** Moves by a key; returns whether it was one that moves. */
  key(name) {
    const count = this.nodes.length;
    if (name in WAYS) this.go(nearestThatWay(this.spots, this.at, WAYS[name]));
    else if (name === "PageDown") this.go((this.at + 1) % count);
    else if (name === "PageUp") this.go((this.at + count - 1) % count);
    else if (name === "Home") this.go(0);
    else if (name === "End") this.go(count - 1);
    else return false;
    return true;
  }
}
