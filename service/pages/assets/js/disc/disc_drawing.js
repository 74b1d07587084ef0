// The disc: one element for each projection, in a group that turns; over it the row of star wheels, which does not.
import { svg } from "../dom.js";
import { text } from "../texts.js";
import { extents, onDrawing } from "./placing.js";
import { rowOf } from "./row_drawing.js";
import { circlePath, edgesPath, fine, frameAt, openingPath } from "./shapes.js";

const MARGIN = 1.09; // of the rim: room for the arrow of the turning
const RING = 0.016; // of half the drawing: the ring round what is chosen
const LINE = 0.0021; // of half the drawing as it is seen whole: a line's width, of which the style sheet takes parts
const LEAST_LINE_MM = 0.03;

export function discDrawing(state) {
  const { movement } = state;
  const half = Math.max(movement.rim_mm, movement.tracks.at(-1).radius_mm) * MARGIN;
  const turning = svg("g", { class: "turning" });
  const row = rowOf(state, half);
  const view = svg("g", { class: "view" }, turning, row.element, arrow(movement, half));
  const box = [-half, -half, 2 * half, 2 * half].map(fine).join(" ");
  const element = svg("svg", { class: "disc", viewBox: box }, view);
  const drawn = { element, view, turning, row, half, things: new Map(), marks: svg("g", { class: "marks" }), zoom: 1 };
  const ring = svg("circle", { class: "ring", hidden: true });
  const pointer = svg("circle", { class: "ring pointing", hidden: true });
  const fill = () => {
    drawn.things.clear();
    turning.replaceChildren(blank(movement), ...projectionsOf(state, drawn), drawn.marks, pointer, ring);
    row.redraw();
    drawn.sizeLines(drawn.zoom);
  };
  drawn.sizeLines = (zoom) => {
    drawn.zoom = zoom;
    turning.style.willChange = "auto"; // for one frame, so that the layer is painted anew at its new size
    requestAnimationFrame(() => { turning.style.willChange = ""; });
    const radius = fine((half * RING) / Math.sqrt(zoom));
    element.style.setProperty("--line", `${fine(Math.max(LEAST_LINE_MM, (half * LINE) / zoom))}px`);
    for (const circle of [ring, pointer, ...drawn.marks.querySelectorAll("circle.at")]) circle.setAttribute("r", radius);
  };
  state.subscribe("shown", fill);
  state.subscribe("chosen", () => follow(drawn, ring, state.chosen, "chosen"));
  state.subscribe("pointed", () => follow(drawn, pointer, state.pointed, "pointed"));
  // The one thing that moves in a frame, beside the few teeth that are lifted.
  state.subscribe("turned", () => {
    turning.style.transform = `rotate(${movement.direction * state.turned_deg}deg)`;
    row.turn(state.turned_deg);
  });
  fill();
  return drawn;
}

function follow(drawn, ring, thing, name) {
  drawn.turning.querySelectorAll(`.${name}`).forEach((element) => element.classList.remove(name));
  ring.toggleAttribute("hidden", thing === null);
  if (thing === null) return;
  const [x, y] = onDrawing(thing.radius_mm, thing.angle_deg);
  ring.setAttribute("cx", fine(x));
  ring.setAttribute("cy", fine(y));
  drawn.things.get(thing)?.classList.add(name);
}

function projectionsOf(state, drawn) {
  const { movement, shown } = state;
  const opening = openingPath(movement);
  const made = (thing, name) => {
    const element = svg("path", {
      class: name,
      d: opening,
      transform: frameAt(thing.radius_mm, thing.angle_deg, movement),
      tabindex: "-1",
      [`data-${thing.kind === "projection" ? "projection" : "left-out"}`]: thing.index,
    });
    drawn.things.set(thing, element);
    return element;
  };
  const folds = movement.pattern.fold_mm;
  return [
    svg("g", { class: "left-outs" }, shown.leftOut.map((thing) => made(thing, "left-out"))),
    svg("g", { class: "projections" }, shown.projections.map((thing) => made(thing, `projection${folds ? " folded" : ""}`))),
    svg("path", { class: "edges", d: edgesPath(shown.projections, movement) }),
  ];
}

function blank(movement) {
  const { rim_mm, hole_mm } = movement;
  return svg(
    "g",
    { class: "blank" },
    svg("path", { class: "metal", d: circlePath(rim_mm) + circlePath(hole_mm), "fill-rule": "evenodd" }),
    movement.keep_out.flatMap((radii) =>
      radii.filter((radius) => radius > 0).map((radius) => svg("circle", { class: "keep-out", r: fine(radius) }))),
    svg("path", { class: "tracks", d: movement.tracks.map((track) => circlePath(track.radius_mm)).join("") }),
    movement.features.map(featureOf),
    indexMark(movement),
  );
}

function featureOf(feature) {
  const round = feature.shape === "notch" ? 0 : Math.min(feature.width_mm, feature.length_mm) / 2;
  return svg("rect", {
    class: `feature ${feature.shape}`,
    x: fine(-feature.width_mm / 2),
    y: fine(-feature.length_mm / 2),
    width: feature.width_mm,
    height: feature.length_mm,
    rx: fine(round),
    transform: `rotate(${-feature.angle_deg})translate(${feature.radius_mm} 0)`,
  });
}

// Where the disc rests: a barb at the rim, on the radius that lies over the star wheels before the turn.
function indexMark(movement) {
  const { from_v, to_v } = extents(movement.pattern);
  const outer = movement.rim_mm;
  const inner = Math.max(outer * 0.965, Math.min(movement.tracks.at(-1).radius_mm + (to_v - from_v), outer * 0.99));
  const barb = (outer - inner) * 0.6 * movement.direction;
  return svg("path", { class: "index-mark", d: `M${fine(inner)} 0H${fine(outer)}L${fine((inner + outer) / 2)} ${fine(barb)}Z` });
}

function arrow(movement, half) {
  const radius = (movement.rim_mm + half) / 2;
  const sign = movement.direction;
  const at = (deg) => onDrawing(radius, deg);
  const [from, to] = sign > 0 ? [64, 48] : [48, 64];
  const [x1, y1] = at(from);
  const [x2, y2] = at(to);
  const ahead = (to * Math.PI) / 180 - (sign * Math.PI) / 2;
  const size = half * 0.022;
  const tip = [x2 + size * 1.5 * Math.cos(ahead), y2 - size * 1.5 * Math.sin(ahead)];
  const side = (way) => [x2 + way * size * 0.6 * Math.cos(ahead + Math.PI / 2), y2 - way * size * 0.6 * Math.sin(ahead + Math.PI / 2)];
  const head = [tip, side(1), side(-1)].map(([x, y]) => `${fine(x)} ${fine(y)}`).join("L");
  return svg(
    "g",
    { class: "arrow" },
    svg("title", {}, text(`disc.turns_${sign > 0 ? "clockwise" : "anticlockwise"}`)),
    svg("path", { d: `M${fine(x1)} ${fine(y1)}A${fine(radius)} ${fine(radius)} 0 0 ${sign > 0 ? 1 : 0} ${fine(x2)} ${fine(y2)}` }),
    svg("path", { class: "head", d: `M${head}Z` }),
  );
}
