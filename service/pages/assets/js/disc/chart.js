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

export function openChart(state) {
  const scroll = find("#chart-scroll");
  const names = find("#chart-names");
  const wide = find("#chart-wide");
  const { movement } = state;
  const radii = movement.tracks.map((track) => track.radius_mm);
  const high = Math.min(MOST, Math.max(LEAST, radii.length * ROW));
  const pxPerMm = radii.length > 1 ? (high - 12) / (radii.at(-1) - radii[0]) : 10;
  const yOf = (radius_mm) => TOP + high - 6 - (radius_mm - radii[0]) * pxPerMm;
  const head = svg("path", { class: "head", d: `M0 ${TOP}V${TOP + high}` });
  const marks = svg("g", { class: "marks" });
  const chart = { scroll, marks, things: new Map(), yOf, pxPerDeg: 1, high, top: TOP };

  function draw() {
    names.replaceChildren(namesOf(movement, yOf, TOP + high + FOOT)); // first: it takes its part of the width
    const room = Math.max(240, scroll.clientWidth - 2);
    chart.pxPerDeg = (room * 2 ** Number(wide.value)) / 360;
    chart.things.clear();
    const width = Math.ceil(360 * chart.pxPerDeg);
    const element = svg(
      "svg",
      { class: "plot-turn", width, height: TOP + high + FOOT },
      ground(state, chart, width),
      ...thingsOf(state, chart, pxPerMm),
      marks,
      head,
    );
    scroll.replaceChildren(element);
    chart.element = element;
    turn();
  }
  function turn() {
    head.style.transform = `translateX(${fine(state.turned_deg * chart.pxPerDeg)}px)`;
  }
  function follow(thing, name) {
    scroll.querySelectorAll(`.${name}`).forEach((element) => element.classList.remove(name));
    if (thing !== null) chart.things.get(thing)?.classList.add(name);
  }
  chart.bring = (turned_deg) => {
    const x = turned_deg * chart.pxPerDeg;
    if (x < scroll.scrollLeft + 20 || x > scroll.scrollLeft + scroll.clientWidth - 20) {
      scroll.scrollLeft = x - scroll.clientWidth / 2;
    }
  };
  // Scrolls on once the head has gone past a share of what is seen.
  chart.follow = (turned_deg, share) => {
    const x = turned_deg * chart.pxPerDeg - scroll.scrollLeft;
    if (x > scroll.clientWidth * share || x < 0) scroll.scrollLeft += x - scroll.clientWidth * 0.1;
  };
  chart.at = (event) => {
    const box = chart.element.getBoundingClientRect();
    return [event.clientX - box.left, event.clientY - box.top];
  };
  draw();
  state.subscribe("shown", draw);
  state.subscribe("turned", turn);
  state.subscribe("chosen", () => follow(state.chosen, "chosen"));
  state.subscribe("pointed", () => follow(state.pointed, "pointed"));
  const redraw = () => {
    draw();
    chart.onRedraw?.();
    follow(state.chosen, "chosen");
    chart.bring(state.chosen ? state.chosen.turned_deg : state.turned_deg);
  };
  wide.addEventListener("input", redraw);
  let width = scroll.clientWidth;
  new ResizeObserver(() => {
    if (scroll.clientWidth === width) return;
    width = scroll.clientWidth;
    redraw();
  }).observe(scroll);
  return chart;
}

function thingsOf(state, chart, pxPerMm) {
  const { movement, shown } = state;
  const { from_u, to_u, from_v, to_v } = extents(movement.pattern);
  const height = Math.max(3, (to_v - from_v) * pxPerMm);
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

function namesOf(movement, yOf, height) {
  let last = Infinity;
  const shown = movement.tracks.filter((track) => {
    const y = yOf(track.radius_mm);
    if (track.pitch === null || last - y < NAMED) return false;
    last = y;
    return true;
  });
  const words = shown.map((track) => svg("text", { x: 36, y: fine(yOf(track.radius_mm) + 4) }, track.pitch));
  return svg("svg", { width: 42, height }, svg("text", { x: 36, y: TOP - 8 }, text("disc.axis_bar")), words);
}
