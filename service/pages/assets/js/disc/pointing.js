// Pointing and choosing, on the disc and on the chart alike: by pointer, by focus, by the arrow keys.
import { labelOf } from "./panel.js";
import { onDrawing } from "./placing.js";

const NEAR_PX = 12; // how far off a pointer may be
const NEAR_TOUCH_PX = 22; // a finger is wider

// `seek` goes to an angle, in degrees turned; `view` and `chart` as they open themselves.
export function openPointing(state, { drawn, view, chart, seek }) {
  const all = () => [...state.shown.projections, ...state.shown.leftOut];
  const nearest = (distanceTo, most) => {
    let best = null;
    let least = most;
    for (const thing of all()) {
      const distance = distanceTo(thing);
      if (distance <= least) [best, least] = [thing, distance];
    }
    return best;
  };
  const reach = (event) => (event.pointerType === "touch" ? NEAR_TOUCH_PX : NEAR_PX);
  const onDisc = (event) => {
    const [x, y] = view.onDisc(event);
    return nearest(
      (thing) => {
        const at = onDrawing(thing.radius_mm, thing.angle_deg);
        return Math.hypot(at[0] - x, at[1] - y);
      },
      reach(event) / view.pixelsPerMm(),
    );
  };
  const onChart = (event) => {
    const [x, y] = chart.at(event);
    return nearest((thing) => Math.hypot(thing.turned_deg * chart.pxPerDeg - x, chart.yOf(thing.radius_mm) - y), reach(event));
  };

  drawn.element.addEventListener("pointermove", (event) => {
    if (event.pointerType !== "touch" && event.buttons === 0) state.point(onDisc(event));
  });
  drawn.element.addEventListener("click", (event) => {
    if (view.wasDragged() || event.target.closest("[data-finding]")) return;
    state.choose(onDisc(event));
  });
  chart.scroll.addEventListener("pointermove", (event) => {
    if (event.pointerType !== "touch") state.point(onChart(event));
  });
  chart.scroll.addEventListener("click", (event) => {
    if (event.target.closest("[data-finding]")) return;
    const thing = onChart(event);
    state.choose(thing);
    if (thing === null) seek(Math.min(360, Math.max(0, chart.at(event)[0] / chart.pxPerDeg)));
  });
  for (const area of [drawn.element, chart.scroll]) area.addEventListener("pointerleave", () => state.point(null));

  // The chosen one alone can be reached by Tab, and says what it is.
  let named = [];
  state.subscribe("chosen", () => {
    for (const element of named) {
      element.setAttribute("tabindex", "-1");
      element.removeAttribute("role");
      element.removeAttribute("aria-label");
    }
    named = state.chosen === null ? [] : [drawn.things.get(state.chosen), chart.things.get(state.chosen)];
    for (const element of named) {
      element.setAttribute("tabindex", "0");
      element.setAttribute("role", "img");
      element.setAttribute("aria-label", labelOf(state.chosen, state));
    }
  });

  return {
    // Chooses, brings into view and gives the focus to what is chosen, on the drawing that has it.
    go(thing, onStage) {
      if (thing === null || thing === undefined) return;
      state.choose(thing);
      const at = onDrawing(thing.radius_mm, thing.angle_deg);
      if (!view.isInView(at)) view.bring([at]);
      chart.bring(thing.turned_deg);
      (onStage ? drawn : chart).things.get(thing)?.focus({ preventScroll: true });
    },
    // The next or the one before in time, left-out notes among them; the first near the row where none is chosen.
    along(step) {
      const ordered = all().sort((a, b) => a.turned_deg - b.turned_deg || a.track - b.track);
      if (state.chosen === null) return ordered.find((thing) => thing.turned_deg >= state.turned_deg - 1e-6) ?? ordered[0];
      return ordered[ordered.indexOf(state.chosen) + step] ?? state.chosen;
    },
    first: () => state.shown.byTime[0],
    last: () => state.shown.byTime.at(-1),
    // The nearest in time on the next track outwards (+1) or inwards (−1) that has any.
    across(step) {
      const from = state.chosen;
      if (from === null) return state.shown.byTime[0];
      const beyond = all().filter((thing) => (thing.track - from.track) * step > 0);
      if (!beyond.length) return from;
      const track = beyond.reduce((best, thing) => (Math.abs(thing.track - from.track) < Math.abs(best - from.track) ? thing.track : best), beyond[0].track);
      const off = (thing) => Math.abs(thing.turned_deg - from.turned_deg);
      return beyond.filter((thing) => thing.track === track).reduce((best, thing) => (off(thing) < off(best) ? thing : best));
    },
  };
}
