// The disc that is shown, what is chosen on it, and how far it has turned. Drawings redraw from here:
//   subscribe("shown", f)    another layout stands here: draw all again
//   subscribe("chosen", f)   a projection or a left-out note was chosen; "pointed": one lies under the pointer
//   subscribe("marked", f)   a finding shall be seen
//   subscribe("turned", f)   the disc stands at another angle
import { placed } from "./placing.js";

const SUBJECTS = ["shown", "chosen", "pointed", "marked", "turned"];

// `data` is the page's block disc-data.
export function openState(data) {
  const told = Object.fromEntries(SUBJECTS.map((subject) => [subject, new Set()]));
  const tell = (subject) => told[subject].forEach((listener) => listener(state));
  const state = {
    movement: data.movement,
    rulings_at: data.rulings_at,
    layout: data.layout,
    hearing: data.hearing,
    shown: placed(data.layout, data.movement),
    chosen: null,
    pointed: null,
    marked: null,
    turned_deg: 0,
    // Gives a function that ends the subscription.
    subscribe(subject, listener) {
      told[subject].add(listener);
      return () => told[subject].delete(listener);
    },
    // Another layout of the same movement: a layout.json, or the `layout` of a page's disc-data; and where it is heard.
    show(layout, hearing = state.hearing) {
      state.layout = layout;
      state.hearing = hearing;
      state.shown = placed(layout, state.movement);
      state.chosen = state.pointed = state.marked = null;
      SUBJECTS.forEach(tell);
    },
    // A thing of shown.projections or shown.leftOut, or null.
    choose(thing) {
      if (thing === state.chosen) return;
      state.chosen = thing;
      tell("chosen");
    },
    point(thing) {
      if (thing === state.pointed) return;
      state.pointed = thing;
      tell("pointed");
    },
    // Place of a finding in layout.findings, or null.
    mark(place) {
      state.marked = place;
      tell("marked");
    },
    turn(turned_deg) {
      state.turned_deg = turned_deg;
      tell("turned");
    },
  };
  return state;
}
