// The difference to the layout before, marked on disc and chart: rings round what is new or moved, crosses where
// plucks are gone.
import { svg } from "../dom.js";
import { onDrawing } from "../disc/placing.js";
import { fine } from "../disc/shapes.js";

const CROSS = 0.012; // of half the drawing
const CROSS_PX = 5;

export function openMarks({ state, drawn, chart }) {
  let shown = { fresh: [], gone: [] };
  const draw = () => {
    drawn.turning.querySelector(".differences")?.remove();
    drawn.turning.append(svg("g", { class: "differences" }, shown.fresh.map((one) => onDisc(one, drawn)), shown.gone.map((one) => onDisc(one, drawn))));
    drawChart();
  };
  const drawChart = () => {
    chart.scroll.querySelector(".differences")?.remove();
    const group = svg("g", { class: "differences" }, [...shown.fresh, ...shown.gone].map((one) => onChart(one, chart)));
    chart.scroll.querySelector("svg").append(group);
  };
  chart.onRedraw(drawChart);
  return {
    // `before` are the things shown before, by note; the difference is of notes.
    show(difference, before) {
      const things = thingsByNote(state.shown);
      const made = (kind, notes, where) =>
        notes.flatMap((note) => (where.has(note) ? [{ kind, thing: where.get(note) }] : []));
      shown = {
        fresh: [...made("added", difference.added, things), ...made("moved", difference.moved, things)],
        gone: made("gone", difference.gone, before),
      };
      draw();
    },
    clear() {
      shown = { fresh: [], gone: [] };
      draw();
    },
  };
}

export function thingsByNote(shown) {
  const found = new Map();
  for (const thing of shown.projections) if (thing.again_of === undefined) for (const note of thing.notes) found.set(note, thing);
  return found;
}

function onDisc({ kind, thing }, drawn) {
  const [x, y] = onDrawing(thing.radius_mm, thing.angle_deg);
  const size = drawn.half * CROSS;
  if (kind === "gone") return svg("path", { class: "difference gone", d: cross(x, y, size) });
  return svg("circle", { class: `difference ${kind}`, cx: fine(x), cy: fine(y), r: fine(size) });
}

function onChart({ kind, thing }, chart) {
  const [x, y] = [thing.turned_deg * chart.pxPerDeg, chart.yOf(thing.radius_mm)];
  if (kind === "gone") return svg("path", { class: "difference gone", d: cross(x, y, CROSS_PX) });
  return svg("circle", { class: `difference ${kind}`, cx: fine(x), cy: fine(y), r: CROSS_PX + 2 });
}

const cross = (x, y, size) =>
  `M${fine(x - size)} ${fine(y - size)}L${fine(x + size)} ${fine(y + size)}M${fine(x - size)} ${fine(y + size)}L${fine(x + size)} ${fine(y - size)}`;
