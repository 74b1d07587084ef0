// The keys of the disc and of the chart; the page lists them under "Mouse, touch and keys".
import { onDrawing } from "./placing.js";

const A_LITTLE_DEG = 1;
const MUCH_DEG = 10;
const A_STEP = 0.1; // of half the drawing
const MOVES = { ArrowLeft: [1, 0], ArrowRight: [-1, 0], ArrowUp: [0, 1], ArrowDown: [0, -1] };

export function openKeys(areas, state, { view, pointing, playing }) {
  const deeds = {
    "+": () => view.stepBy(1),
    "=": () => view.stepBy(1),
    "-": () => view.stepBy(-1),
    0: () => view.whole(),
    "[": () => view.turnBy(-A_LITTLE_DEG),
    "]": () => view.turnBy(A_LITTLE_DEG),
    PageUp: () => view.turnBy(-MUCH_DEG),
    PageDown: () => view.turnBy(MUCH_DEG),
    " ": () => playing.toggle(),
    Escape: () => {
      state.choose(null);
      state.mark(null);
    },
    Enter: () => state.chosen && view.bring([onDrawing(state.chosen.radius_mm, state.chosen.angle_deg)]),
  };
  const steps = {
    ArrowLeft: () => pointing.along(-1),
    ArrowRight: () => pointing.along(1),
    ArrowUp: () => pointing.across(1),
    ArrowDown: () => pointing.across(-1),
    Home: () => pointing.first(),
    End: () => pointing.last(),
  };
  areas.forEach((area, place) =>
    area.addEventListener("keydown", (event) => {
      if (event.ctrlKey || event.metaKey || event.altKey || event.target.closest("[data-finding]")) return;
      if (event.shiftKey && MOVES[event.key]) view.moveBy(...MOVES[event.key].map((way) => way * A_STEP * view.half));
      else if (steps[event.key]) pointing.go(steps[event.key](), place === 0);
      else if (deeds[event.key]) deeds[event.key]();
      else return;
      event.preventDefault();
    }));
}
