// Pointing and choosing, on the disc and on the chart alike: by pointer, by focus, by the arrow keys.
import { labelOf } from "./panel.js";
import { onDrawing } from "./placing.js";

const NEAR_PX = 12; // how far off a pointer may be
const NEAR_TOUCH_PX = 22; // a finger is wider
const reach = (event) => (event.pointerType === "touch" ? NEAR_TOUCH_PX : NEAR_PX);
const byTime = (a, b) => a.turned_deg - b.turned_deg || a.track - b.track;
const least = (things, sizeOf) => things.reduce((best, thing) => (sizeOf(thing) < sizeOf(best) ? thing : best));

export class Pointing {
  #state;
  #drawn;
  #view;
  #hands;
  #chart;

  // `seek` goes to an angle, in degrees turned.
  constructor(state, { drawn, view, hands, chart, seek }) {
    [this.#state, this.#drawn, this.#view, this.#hands, this.#chart] = [state, drawn, view, hands, chart];
    this.#listenOnDisc();
    this.#listenOnChart(seek);
    for (const area of [drawn.element, chart.scroll]) area.addEventListener("pointerleave", () => state.point(null));
    let named = [];
    state.subscribe("chosen", () => { named = this.#name(named); });
  }

  // Chooses, brings into view and gives the focus to what is chosen, on the drawing that has it.
  go(thing, onStage) {
    if (thing === null || thing === undefined) return;
    this.#state.choose(thing);
    const at = onDrawing(thing.radius_mm, thing.angle_deg);
    if (!this.#view.isInView(at)) this.#view.bring([at]);
    this.#chart.bring(thing.turned_deg);
    (onStage ? this.#drawn : this.#chart).things.get(thing)?.focus({ preventScroll: true });
  }

  // The next or the one before in time, left-out notes among them; the first past the row where none is chosen.
  along(step) {
    const { chosen, turned_deg } = this.#state;
    const ordered = this.#all().sort(byTime);
    if (chosen === null) return ordered.find((thing) => thing.turned_deg >= turned_deg - 1e-6) ?? ordered[0];
    return ordered[ordered.indexOf(chosen) + step] ?? chosen;
  }

  first() {
    return this.#state.shown.byTime[0];
  }

  last() {
    return this.#state.shown.byTime.at(-1);
  }

  // The nearest in time on the next track outwards (+1) or inwards (−1) that has any.
  across(step) {
    const from = this.#state.chosen;
    if (from === null) return this.first();
    const beyond = this.#all().filter((thing) => (thing.track - from.track) * step > 0);
    if (!beyond.length) return from;
    const { track } = least(beyond, (thing) => Math.abs(thing.track - from.track));
    return least(beyond.filter((thing) => thing.track === track), (thing) => Math.abs(thing.turned_deg - from.turned_deg));
  }

  #all() {
    return [...this.#state.shown.projections, ...this.#state.shown.leftOut];
  }

  #nearest(distanceTo, most) {
    const all = this.#all();
    const best = all.length ? least(all, distanceTo) : null;
    return best !== null && distanceTo(best) <= most ? best : null;
  }

  #onDisc(event) {
    const [x, y] = this.#view.onDisc(event);
    const distanceTo = (thing) => {
      const at = onDrawing(thing.radius_mm, thing.angle_deg);
      return Math.hypot(at[0] - x, at[1] - y);
    };
    return this.#nearest(distanceTo, reach(event) / this.#view.pixelsPerMm) ?? this.#hit(event, this.#drawn.things);
  }

  #onChart(event) {
    const chart = this.#chart;
    const [x, y] = chart.at(event);
    const distanceTo = (thing) => Math.hypot(thing.turned_deg * chart.pxPerDeg - x, chart.yOf(thing.radius_mm) - y);
    return this.#nearest(distanceTo, reach(event)) ?? this.#hit(event, chart.things);
  }

  // Seen from near, an opening is longer than the reach of its working edge: then what is hit is meant.
  #hit(event, things) {
    const element = event.target.closest(".projection, .left-out");
    return element === null ? null : this.#all().find((thing) => things.get(thing) === element) ?? null;
  }

  #listenOnDisc() {
    const { element } = this.#drawn;
    element.addEventListener("pointermove", (event) => {
      if (event.pointerType !== "touch" && event.buttons === 0) this.#state.point(this.#onDisc(event));
    });
    element.addEventListener("click", (event) => {
      if (!this.#hands.dragged && !event.target.closest("[data-finding]")) this.#state.choose(this.#onDisc(event));
    });
  }

  #listenOnChart(seek) {
    const { scroll } = this.#chart;
    scroll.addEventListener("pointermove", (event) => {
      if (event.pointerType !== "touch") this.#state.point(this.#onChart(event));
    });
    scroll.addEventListener("click", (event) => {
      if (event.target.closest("[data-finding]")) return;
      const thing = this.#onChart(event);
      this.#state.choose(thing);
      if (thing === null) seek(Math.min(360, Math.max(0, this.#chart.at(event)[0] / this.#chart.pxPerDeg)));
    });
  }

  // The chosen one alone can be reached by Tab, and says what it is.
  #name(before) {
    for (const element of before) {
      element.setAttribute("tabindex", "-1");
      element.removeAttribute("role");
      element.removeAttribute("aria-label");
    }
    const { chosen } = this.#state;
    const named = chosen === null ? [] : [this.#drawn.things.get(chosen), this.#chart.things.get(chosen)];
    for (const element of named) {
      element.setAttribute("tabindex", "0");
      element.setAttribute("role", "img");
      element.setAttribute("aria-label", labelOf(chosen, this.#state));
    }
    return named;
  }
}
