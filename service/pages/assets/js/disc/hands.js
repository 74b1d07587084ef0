// Mouse, wheel and fingers on the drawing: drag moves it, with Shift turns the disc; two fingers do all at once.
const A_DRAG = 0.01; // of half the drawing: what moves less is a click

export class Hands {
  #view;
  #pointers = new Map();
  #moved = 0;

  constructor(element, view) {
    this.#view = view;
    element.addEventListener("pointerdown", (event) => {
      if (event.button > 0) return;
      this.#pointers.set(event.pointerId, view.onSheet(event));
      this.#moved = 0;
    });
    element.addEventListener("pointermove", (event) => this.#move(element, event));
    for (const name of ["pointerup", "pointercancel"]) {
      element.addEventListener(name, (event) => this.#pointers.delete(event.pointerId));
    }
    element.addEventListener("wheel", (event) => this.#wheel(event), { passive: false });
  }

  // Whether the last touch or press moved the drawing, so that its end chooses nothing.
  get dragged() {
    return this.#moved > this.#view.half * A_DRAG;
  }

  #move(element, event) {
    const before = this.#pointers.get(event.pointerId);
    if (!before) return;
    const now = this.#view.onSheet(event);
    this.#moved += Math.hypot(now[0] - before[0], now[1] - before[1]);
    if (this.dragged || this.#pointers.size > 1) {
      if (!element.hasPointerCapture(event.pointerId)) element.setPointerCapture(event.pointerId);
      const other = [...this.#pointers].find(([id]) => id !== event.pointerId);
      if (other) this.#pinch(before, now, other[1]);
      else if (event.shiftKey) this.#view.turnOnScreen(this.#angleOf(now) - this.#angleOf(before));
      else this.#view.moveBy(now[0] - before[0], now[1] - before[1]);
    }
    this.#pointers.set(event.pointerId, now);
  }

  #pinch(before, now, other) {
    const [was, is] = [before, now].map(([x, y]) => [x - other[0], y - other[1]]);
    this.#view.moveBy((now[0] - before[0]) / 2, (now[1] - before[1]) / 2);
    this.#view.zoomBy(Math.hypot(...is) / Math.hypot(...was) || 1, [(now[0] + other[0]) / 2, (now[1] + other[1]) / 2]);
    this.#view.turnOnScreen(Math.atan2(is[1], is[0]) - Math.atan2(was[1], was[0]));
  }

  #angleOf([x, y]) {
    return Math.atan2(y - this.#view.y, x - this.#view.x);
  }

  #wheel(event) {
    const nearer = event.deltaY < 0;
    if (event.deltaY === 0 || (!nearer && this.#view.zoom === 1)) return; // the page goes on scrolling
    event.preventDefault();
    this.#view.stepBy(Math.min(2, Math.max(-2, -event.deltaY / 100)), this.#view.onSheet(event));
  }
}
