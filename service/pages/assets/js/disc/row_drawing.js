// The row of star wheels, and beside it the row of teeth: a tooth is lifted while its wheel is pushed, and springs back.
import { svg } from "../dom.js";
import { fine } from "./shapes.js";

const DEG = 180 / Math.PI;
const LONGEST = 0.15; // of half the drawing: the innermost, lowest tooth; the outermost is half as long
const SPRING_S = 0.4; // s; how long a tooth is seen to swing: to be seen, not its own frequency
const SWING_HZ = 9;
const LIFT = 0.3; // of its length: how much shorter a lifted tooth looks from above

export function rowOf(state, half) {
  const { movement } = state;
  const element = svg("g", { class: "row" });
  const teeth = movement.tracks.map((track, place) => toothOf(movement, track, place, half));
  element.append(...wheelsOf(movement), ...teeth.map((tooth) => tooth.element), combOf(movement, teeth));
  const spring_deg = (SPRING_S * 360) / movement.revolution_s;
  const engaged = movement.tracks.map((track) => (track.engagement_mm / track.radius_mm) * DEG);
  const most_deg = Math.max(...engaged);
  let turned = [];
  let active = new Set();
  return {
    element,
    redraw() {
      turned = state.shown.byTime.map((projection) => projection.turned_deg);
    },
    // Draws the teeth as they stand when the disc has turned so far: only those lifted or springing are touched.
    turn(now_deg) {
      const lifted = new Map();
      for (let place = firstFrom(turned, now_deg - spring_deg); place < turned.length; place += 1) {
        const ahead = turned[place] - now_deg;
        if (ahead > most_deg) break;
        const index = state.shown.byTime[place].track - 1;
        if (ahead > engaged[index]) continue;
        const since_s = (-ahead * movement.revolution_s) / 360;
        if (ahead > 0) lifted.set(index, { height: 1 - ahead / engaged[index], name: "lifted" });
        else if (!lifted.has(index) || lifted.get(index).name === "sounding") {
          lifted.set(index, { height: swing(since_s), name: "sounding" });
        }
      }
      for (const index of active) if (!lifted.has(index)) teeth[index].rest();
      for (const [index, { height, name }] of lifted) teeth[index].lift(height, name);
      active = new Set(lifted.keys());
    },
  };
}

const swing = (since_s) => 0.5 * Math.exp((-4 * since_s) / SPRING_S) * Math.cos(2 * Math.PI * SWING_HZ * since_s);

function firstFrom(sorted, value) {
  let low = 0;
  let high = sorted.length;
  while (low < high) {
    const middle = (low + high) >> 1;
    if (sorted[middle] < value) low = middle + 1;
    else high = middle;
  }
  return low;
}

const alongRow = (movement, track) => Math.sqrt(track.radius_mm ** 2 - movement.row_mm ** 2);

function wheelsOf(movement) {
  const { thickness_mm, reach_mm } = movement.wheel;
  return movement.tracks.map((track) =>
    svg("rect", {
      class: "wheel",
      x: fine(alongRow(movement, track) - thickness_mm / 2),
      y: fine(-movement.row_mm - reach_mm),
      width: fine(thickness_mm),
      height: fine(2 * reach_mm),
    }));
}

// A tooth lies where the metal has passed, its tip at the star wheel; drawn from its root, so that it shortens to there.
function toothOf(movement, track, place, half) {
  const { tracks, direction, row_mm, wheel } = movement;
  const share = tracks.length > 1 ? place / (tracks.length - 1) : 0;
  const room = tracks.length > 1 ? (tracks.at(-1).radius_mm - tracks[0].radius_mm) / (tracks.length - 1) : half * 0.1;
  const width = Math.min(room * 0.55, half * 0.02);
  const tip = -row_mm + direction * (wheel.reach_mm + half * 0.006);
  const length = half * LONGEST * (1 - share / 2);
  const root = tip + direction * length;
  const x = alongRow(movement, track);
  const element = svg("rect", {
    class: track.teeth.length ? "tooth" : "tooth none",
    x: fine(-width / 2),
    y: fine(direction > 0 ? -length : 0),
    width: fine(width),
    height: fine(length),
    "data-track": place + 1,
  });
  let name = "";
  const draw = (height, next) => {
    element.setAttribute("transform", `translate(${fine(x)} ${fine(root)})scale(1 ${fine(1 - LIFT * height)})`);
    if (next === name) return;
    if (name) element.classList.remove(name);
    if (next) element.classList.add(next);
    name = next;
  };
  draw(0, "");
  return { element, root, x, width, rest: () => draw(0, ""), lift: draw };
}

function combOf(movement, teeth) {
  const first = teeth[0];
  const last = teeth.at(-1);
  const deep = movement.direction * Math.abs(first.root + movement.row_mm) * 0.3;
  const points = [
    [first.x - first.width, first.root],
    [last.x + last.width, last.root],
    [last.x + last.width, last.root + deep],
    [first.x - first.width, first.root + deep],
  ];
  return svg("path", { class: "comb", d: `M${points.map(([x, y]) => `${fine(x)} ${fine(y)}`).join("L")}Z` });
}
