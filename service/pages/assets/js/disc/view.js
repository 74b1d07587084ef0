// How the drawing is looked at: nearer and moved aside; and turned by hand, which is how far the disc has turned.
import { onDrawing } from "./placing.js";
import { fine } from "./shapes.js";

const MOST = 60; // times as large: a hundredth of a millimetre is then a pixel or so
const STEP = 1.35; // a key, a button or a notch of the wheel
const RAD = Math.PI / 180;

const inTurn = (deg) => ((deg % 360) + 360) % 360;
const turned = ([x, y], angle) => [x * Math.cos(angle) - y * Math.sin(angle), x * Math.sin(angle) + y * Math.cos(angle)];

export function openView(stage, drawn, state, seek) {
  const { element, view, half } = drawn;
  const at = { x: 0, y: 0, zoom: 1 };
  const pointers = new Map();
  let moved = 0;

  function draw() {
    const most = half * (at.zoom - 1) + half * 0.5 * (at.zoom > 1);
    at.x = Math.min(most, Math.max(-most, at.x));
    at.y = Math.min(most, Math.max(-most, at.y));
    view.setAttribute("transform", `translate(${fine(at.x)} ${fine(at.y)})scale(${fine(at.zoom)})`);
    stage.style.touchAction = at.zoom > 1 ? "none" : "pan-y";
    stage.dataset.zoom = fine(at.zoom);
    if (drawn.zoom !== at.zoom) drawn.sizeLines(at.zoom);
  }

  // A place of the screen in the drawing's own millimetres, before and after its moving and zooming.
  function onSheet(clientX, clientY) {
    const place = new DOMPoint(clientX, clientY).matrixTransform(element.getScreenCTM().inverse());
    return [place.x, place.y];
  }
  const inView = ([x, y]) => [(x - at.x) / at.zoom, (y - at.y) / at.zoom];
  const turnedOn = (point) => turned(point, state.movement.direction * state.turned_deg * RAD);
  const turnedBack = (point) => turned(point, -state.movement.direction * state.turned_deg * RAD);

  function zoomBy(times, about = [0, 0]) {
    const zoom = Math.min(MOST, Math.max(1, at.zoom * times));
    const [x, y] = inView(about);
    Object.assign(at, { zoom, x: about[0] - x * zoom, y: about[1] - y * zoom });
    draw();
  }

  // Where buttons and keys look nearer: at what is chosen, else at the row of star wheels, else at the middle.
  function about() {
    if (state.chosen !== null) {
      const [x, y] = turnedOn(onDrawing(state.chosen.radius_mm, state.chosen.angle_deg));
      const place = [x * at.zoom + at.x, y * at.zoom + at.y];
      if (Math.max(...place.map(Math.abs)) < half) return place;
    }
    return at.zoom === 1 ? [half * 0.45, 0] : [0, 0];
  }
  const angleOf = ([x, y]) => Math.atan2(y - at.y, x - at.x);
  const between = (a, b) => [(a[0] + b[0]) / 2, (a[1] + b[1]) / 2];

  function dragged(event, now) {
    const before = pointers.get(event.pointerId);
    const others = [...pointers].filter(([id]) => id !== event.pointerId);
    if (others.length) {
      const other = others[0][1];
      const spread = Math.hypot(now[0] - other[0], now[1] - other[1]) / Math.hypot(before[0] - other[0], before[1] - other[1]);
      const [from, to] = [between(before, other), between(now, other)];
      at.x += to[0] - from[0];
      at.y += to[1] - from[1];
      zoomBy(spread || 1, to);
      turnBy(Math.atan2(now[1] - other[1], now[0] - other[0]) - Math.atan2(before[1] - other[1], before[0] - other[0]));
    } else if (event.shiftKey) {
      turnBy(angleOf(now) - angleOf(before));
    } else {
      at.x += now[0] - before[0];
      at.y += now[1] - before[1];
      draw();
    }
  }

  function turnBy(angle_rad) {
    const way = Math.atan2(Math.sin(angle_rad), Math.cos(angle_rad)) / RAD;
    seek(inTurn(state.turned_deg + state.movement.direction * way));
  }

  element.addEventListener("pointerdown", (event) => {
    if (event.button > 0) return;
    pointers.set(event.pointerId, onSheet(event.clientX, event.clientY));
    moved = 0;
  });
  element.addEventListener("pointermove", (event) => {
    const before = pointers.get(event.pointerId);
    if (!before) return;
    const now = onSheet(event.clientX, event.clientY);
    moved += Math.hypot(now[0] - before[0], now[1] - before[1]);
    if (moved > half * 0.01 || pointers.size > 1) {
      if (!element.hasPointerCapture(event.pointerId)) element.setPointerCapture(event.pointerId);
      dragged(event, now);
    }
    pointers.set(event.pointerId, now);
  });
  for (const name of ["pointerup", "pointercancel"]) {
    element.addEventListener(name, (event) => pointers.delete(event.pointerId));
  }
  element.addEventListener(
    "wheel",
    (event) => {
      const nearer = event.deltaY < 0;
      if (event.deltaY === 0 || (!nearer && at.zoom === 1)) return; // the page goes on scrolling
      event.preventDefault();
      zoomBy(STEP ** Math.min(2, Math.max(-2, -event.deltaY / 100)), onSheet(event.clientX, event.clientY));
    },
    { passive: false },
  );

  draw();
  return {
    // A place of the screen on the disc, in the drawing's frame with the disc at rest.
    onDisc: (event) => turnedBack(inView(onSheet(event.clientX, event.clientY))),
    pixelsPerMm: () => Math.abs(element.getScreenCTM().a) * at.zoom,
    wasDragged: () => moved > half * 0.01,
    nearer: () => zoomBy(STEP, about()),
    farther: () => zoomBy(1 / STEP, about()),
    whole: () => {
      Object.assign(at, { x: 0, y: 0, zoom: 1 });
      draw();
    },
    moveBy: (x, y) => {
      at.x += x * half * 0.1;
      at.y += y * half * 0.1;
      draw();
    },
    turnBy: (deg) => seek(inTurn(state.turned_deg + deg)),
    // Brings places of the disc (drawing's frame, at rest) into view, so near that they fill part of it.
    bring(points) {
      const there = points.map(turnedOn);
      const [xs, ys] = [there.map(([x]) => x), there.map(([, y]) => y)];
      const span = Math.max(Math.max(...xs) - Math.min(...xs), Math.max(...ys) - Math.min(...ys), half * 0.12);
      const zoom = Math.min(MOST, Math.max(1, (1.1 * half) / span));
      const middle = [(Math.max(...xs) + Math.min(...xs)) / 2, (Math.max(...ys) + Math.min(...ys)) / 2];
      Object.assign(at, { zoom, x: -middle[0] * zoom, y: -middle[1] * zoom });
      draw();
    },
    isInView(point) {
      const [x, y] = turnedOn(point);
      return Math.max(Math.abs(x * at.zoom + at.x), Math.abs(y * at.zoom + at.y)) < half * 0.95;
    },
  };
}
