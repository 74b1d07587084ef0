// How the drawing is looked at: nearer, and moved aside. The hands that do it stand in hands.js.
import { onDrawing } from "./placing.js";
import { fine } from "./shapes.js";

const MOST = 60; // times as large: a hundredth of a millimetre is then a pixel or so
const STEP = 1.35; // a key, a button or a notch of the wheel
const RAD = Math.PI / 180;

const inTurn = (deg) => ((deg % 360) + 360) % 360;
const turned = ([x, y], angle) => [x * Math.cos(angle) - y * Math.sin(angle), x * Math.sin(angle) + y * Math.cos(angle)];

export class View {
  x = 0;
  y = 0;
  zoom = 1;
  #stage;
  #drawn;
  #state;
  #seek;

  // `seek` turns the disc: it goes to an angle, in degrees turned.
  constructor(stage, drawn, state, seek) {
    [this.#stage, this.#drawn, this.#state, this.#seek] = [stage, drawn, state, seek];
    this.half = drawn.half;
    this.draw();
  }

  draw() {
    const { half, zoom } = this;
    const most = half * (zoom - 1) + half * 0.5 * (zoom > 1);
    this.x = Math.min(most, Math.max(-most, this.x));
    this.y = Math.min(most, Math.max(-most, this.y));
    this.#drawn.view.setAttribute("transform", `translate(${fine(this.x)} ${fine(this.y)})scale(${fine(zoom)})`);
    this.#stage.style.touchAction = zoom > 1 ? "none" : "pan-y";
    this.#stage.dataset.zoom = fine(zoom);
    if (this.#drawn.zoom !== zoom) this.#drawn.sizeLines(zoom);
  }

  // A place of the screen in the drawing's own millimetres, before its moving and zooming.
  onSheet(event) {
    const place = new DOMPoint(event.clientX, event.clientY);
    const { x, y } = place.matrixTransform(this.#drawn.element.getScreenCTM().inverse());
    return [x, y];
  }

  // A place of the screen on the disc, in the drawing's frame with the disc at rest.
  onDisc(event) {
    const [x, y] = this.onSheet(event);
    return turned([(x - this.x) / this.zoom, (y - this.y) / this.zoom], -this.#angle);
  }

  get pixelsPerMm() {
    return Math.abs(this.#drawn.element.getScreenCTM().a) * this.zoom;
  }

  zoomBy(times, about) {
    const zoom = Math.min(MOST, Math.max(1, this.zoom * times));
    const [x, y] = [(about[0] - this.x) / this.zoom, (about[1] - this.y) / this.zoom];
    Object.assign(this, { zoom, x: about[0] - x * zoom, y: about[1] - y * zoom });
    this.draw();
  }

  stepBy(steps, about = this.#about()) {
    this.zoomBy(STEP ** steps, about);
  }

  whole() {
    Object.assign(this, { x: 0, y: 0, zoom: 1 });
    this.draw();
  }

  moveBy(x, y) {
    this.x += x;
    this.y += y;
    this.draw();
  }

  // Turns the disc by hand; degrees in the direction in which it plays.
  turnBy(deg) {
    this.#seek(inTurn(this.#state.turned_deg + deg));
  }

  // The same, by an angle on the screen in radians, clockwise.
  turnOnScreen(angle) {
    const shortest = Math.atan2(Math.sin(angle), Math.cos(angle)) / RAD;
    this.turnBy(this.#state.movement.direction * shortest);
  }

  // Brings places of the disc (drawing's frame, at rest) into view, so near that they fill part of it.
  bring(points) {
    const there = points.map((point) => turned(point, this.#angle));
    const [xs, ys] = [there.map(([x]) => x), there.map(([, y]) => y)];
    const [left, right, top, foot] = [Math.min(...xs), Math.max(...xs), Math.min(...ys), Math.max(...ys)];
    const zoom = Math.min(MOST, Math.max(1, (1.1 * this.half) / Math.max(right - left, foot - top, this.half * 0.12)));
    Object.assign(this, { zoom, x: (-(left + right) / 2) * zoom, y: (-(top + foot) / 2) * zoom });
    this.draw();
  }

  isInView(point) {
    return Math.max(...this.#seen(point).map(Math.abs)) < this.half * 0.95;
  }

  get #angle() {
    return this.#state.movement.direction * this.#state.turned_deg * RAD;
  }

  #seen(point) {
    const [x, y] = turned(point, this.#angle);
    return [x * this.zoom + this.x, y * this.zoom + this.y];
  }

  // Where buttons and keys look nearer: at what is chosen, else at the row of star wheels, else at the middle.
  #about() {
    const { chosen } = this.#state;
    if (chosen !== null) {
      const point = onDrawing(chosen.radius_mm, chosen.angle_deg);
      if (this.isInView(point)) return this.#seen(point);
    }
    return this.zoom === 1 ? [this.half * 0.45, 0] : [0, 0];
  }
}
