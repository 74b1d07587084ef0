// The turn chart: how far the disc has turned across, tracks at their true radii one above the other.
import { find, svg } from "../dom.js";
import { text } from "../texts.js";
import { extents } from "./placing.js";
import { fine } from "./shapes.js";

const TOP = 22; // px: numbers of bars
const FOOT = 38; // px: degrees and seconds
const ROW = 9; // px a track, as far as the chart's height allows
const LEAST = 220;
const MOST = 440;
const NAMED = 13; // px between two names of tracks
const APART = 26; // px between two numbers along an axis
const DEG = 180 / Math.PI;

export class Chart {
  scroll = find("#chart-scroll");
  marks = svg("g", { class: "marks" });
  things = new Map();
  top = TOP;
  pxPerDeg = 1;
  #state;
  #names = find("#chart-names");
  #wide = find("#chart-wide");
  #redrawn = new Set();
  #element;
  #head;

  constructor(state) {
    this.#state = state;
    this.radii = state.movement.tracks.map((track) => track.radius_mm);
    this.high = Math.min(MOST, Math.max(LEAST, this.radii.length * ROW));
    this.pxPerMm = this.radii.length > 1 ? (this.high - 12) / (this.radii.at(-1) - this.radii[0]) : 10;
    this.#head = svg("path", { class: "head", d: `M0 ${TOP}V${TOP + this.high}` });
    this.#draw();
    state.subscribe("shown", () => this.#draw());
    state.subscribe("turned", () => this.#turn());
    state.subscribe("chosen", () => this.#show(state.chosen, "chosen"));
    state.subscribe("pointed", () => this.#show(state.pointed, "pointed"));
    this.#wide.addEventListener("input", () => this.#redraw());
    let width = this.scroll.clientWidth;
    new ResizeObserver(() => {
      if (this.scroll.clientWidth === width) return;
      width = this.scroll.clientWidth;
      this.#redraw();
    }).observe(this.scroll);
  }

  // Who draws marks on the chart draws them again when it has another width.
  onRedraw(listener) {
    this.#redrawn.add(listener);
  }

  yOf(radius_mm) {
    return TOP + this.high - 6 - (radius_mm - this.radii[0]) * this.pxPerMm;
  }

  // A place of the screen in the chart's own pixels.
  at(event) {
    const box = this.#element.getBoundingClientRect();
    return [event.clientX - box.left, event.clientY - box.top];
  }

  bring(turned_deg) {
    const { scroll } = this;
    const x = turned_deg * this.pxPerDeg - scroll.scrollLeft;
    if (x < 20 || x > scroll.clientWidth - 20) scroll.scrollLeft += x - scroll.clientWidth / 2;
  }

  // Scrolls on once the head has gone past a share of what is seen.
  follow(turned_deg, share) {
    const { scroll } = this;
    const x = turned_deg * this.pxPerDeg - scroll.scrollLeft;
    if (x > scroll.clientWidth * share || x < 0) scroll.scrollLeft += x - scroll.clientWidth * 0.1;
  }

  #draw() {
    const height = TOP + this.high + FOOT;
    this.#names.replaceChildren(namesOf(this.#state.movement, this, height)); // first: it takes its part of the width
    this.pxPerDeg = (Math.max(240, this.scroll.clientWidth - 2) * 2 ** Number(this.#wide.value)) / 360;
    this.things.clear();
    const width = Math.ceil(360 * this.pxPerDeg);
    const inside = [ground(this.#state, this, width), ...thingsOf(this.#state, this), this.marks, this.#head];
    this.#element = svg("svg", { class: "plot-turn", width, height }, ...inside);
    this.scroll.replaceChildren(this.#element);
    this.#turn();
  }

  #redraw() {
    const { chosen, turned_deg } = this.#state;
    this.#draw();
    this.#redrawn.forEach((listener) => listener());
    this.#show(chosen, "chosen");
    this.bring(chosen ? chosen.turned_deg : turned_deg);
  }

  #turn() {
    this.#head.style.transform = `translateX(${fine(this.#state.turned_deg * this.pxPerDeg)}px)`;
  }

  #show(thing, name) {
    this.scroll.querySelectorAll(`.${name}`).forEach((element) => element.classList.remove(name));
    if (thing !== null) this.things.get(thing)?.classList.add(name);
  }
}

function thingsOf(state, chart) {
  const { movement, shown } = state;
  const { from_u, to_u, from_v, to_v } = extents(movement.pattern);
  const height = Math.max(3, (to_v - from_v) * chart.pxPerMm);
  const bar = (thing, name) => {
    const pxPerAlong = (DEG / thing.radius_mm) * chart.pxPerDeg;
    const element = svg("rect", {
      class: name,
      x: fine(thing.turned_deg * chart.pxPerDeg - to_u * pxPerAlong),
      y: fine(chart.yOf(thing.radius_mm) - height / 2),
      width: fine((to_u - from_u) * pxPerAlong),
      height: fine(height),
      tabindex: "-1",
    });
    chart.things.set(thing, element);
    return element;
  };
  const edges = shown.projections
    .map((one) => `M${fine(one.turned_deg * chart.pxPerDeg)} ${fine(chart.yOf(one.radius_mm) - height / 2)}v${fine(height)}`)
    .join("");
  return [
    svg("g", { class: "left-outs" }, shown.leftOut.map((thing) => bar(thing, "left-out"))),
    svg("g", { class: "projections" }, shown.projections.map((thing) => bar(thing, "projection"))),
    svg("path", { class: "edges", d: edges }),
  ];
}

function ground(state, chart, width) {
  const { movement, shown } = state;
  const foot = TOP + chart.high;
  const x = (deg) => fine(deg * chart.pxPerDeg);
  const rests = [
    [0, movement.before_music_deg],
    [360 - movement.after_music_deg, 360],
  ].map(([from, to]) => svg("rect", { class: "rest", x: x(from), y: TOP, width: x(to - from), height: chart.high }));
  const tracks = movement.tracks.map((track) => `M0 ${fine(chart.yOf(track.radius_mm))}H${width}`).join("");
  const bars = shown.bars.filter((bar) => bar.turned_deg >= 0 && bar.turned_deg <= 360);
  const every = everyFor(bars.length > 1 ? (bars[1].turned_deg - bars[0].turned_deg) * chart.pxPerDeg : APART, APART);
  const named = bars.filter((bar) => (bar.bar - 1) % every === 0);
  return svg(
    "g",
    { class: "ground" },
    rests,
    svg("path", { class: "tracks", d: tracks }),
    svg("path", { class: "bars", d: bars.map((bar) => `M${x(bar.turned_deg)} ${TOP}V${foot}`).join("") }),
    svg("path", { class: "named-bars", d: named.map((bar) => `M${x(bar.turned_deg)} ${TOP - 4}V${foot}`).join("") }),
    named.map((bar) => svg("text", { x: x(bar.turned_deg), y: TOP - 8 }, bar.bar)),
    degrees(chart).map((deg) => svg("text", { x: x(deg), y: foot + 14, class: place(deg) }, `${deg}°`)),
    degrees(chart).map((deg) => svg("text", { x: x(deg), y: foot + 30, class: `quiet ${place(deg)}` }, seconds(deg, movement))),
    svg("path", { class: "bars", d: degrees(chart).map((deg) => `M${x(deg)} ${foot}v4`).join("") }),
  );
}

const place = (deg) => (deg === 0 ? "first" : deg === 360 ? "last" : "");
const everyFor = (apart, least) => [1, 2, 4, 8, 16, 32, 64, 128].find((every) => apart * every >= least) ?? 256;
const stepFor = (chart) => [1, 5, 10, 15, 30, 45, 60, 90].find((deg) => deg * chart.pxPerDeg >= 2 * APART) ?? 180;

function degrees(chart) {
  const step = stepFor(chart);
  return Array.from({ length: Math.floor(360 / step) + 1 }, (_, place) => place * step);
}

function seconds(deg, movement) {
  const s = ((deg - movement.before_music_deg) * movement.revolution_s) / 360;
  return `${s < 0 ? "−" : ""}${Math.abs(s).toFixed(1)} ${deg === 0 ? text("disc.axis_s") : ""}`.trim();
}

function namesOf(movement, chart, height) {
  let last = Infinity;
  const shown = movement.tracks.filter((track) => {
    const y = chart.yOf(track.radius_mm);
    if (track.pitch === null || last - y < NAMED) return false;
    last = y;
    return true;
  });
  const words = shown.map((track) => svg("text", { x: 36, y: fine(chart.yOf(track.radius_mm) + 4) }, track.pitch));
  return svg("svg", { width: 42, height }, svg("text", { x: 36, y: TOP - 8 }, text("disc.axis_bar")), words);
}
