// Findings: from the list to their place on disc and chart, and from the mark there back to the entry.
import { find, findAll, say, svg } from "../dom.js";
import { text } from "../texts.js";
import { edgeAngle, onDrawing, turnedFor } from "./placing.js";
import { circlePath, fine } from "./shapes.js";

export function openFindings(state, { drawn, view, chart }) {
  const draw = () => {
    drawn.marks.replaceChildren(...state.layout.findings.flatMap((_, place) => discMarks(place, state)));
    drawn.sizeLines(drawn.zoom);
    drawChart();
  };
  const drawChart = () => {
    chart.marks.replaceChildren(...state.layout.findings.flatMap((_, place) => chartMarks(place, state, chart)));
    follow();
  };
  const follow = () => {
    for (const marks of [drawn.marks, chart.marks]) marks.classList.toggle("one-of", state.marked !== null);
    for (const mark of [...drawn.marks.children, ...chart.marks.children]) {
      const current = Number(mark.dataset.finding) === state.marked;
      mark.classList.toggle("current", current);
      mark.setAttribute("tabindex", current ? "0" : "-1");
    }
    for (const entry of findAll(".finding")) entry.classList.toggle("current", entry.id === `finding-${state.marked}`);
  };
  const show = (place) => {
    state.mark(place);
    const points = placesOf(state.layout.findings[place], state).flatMap((one) => one.points);
    if (points.length) view.bring(points);
    const first = placesOf(state.layout.findings[place], state).find((one) => one.turned_deg !== null);
    if (first) chart.bring(first.turned_deg);
    say(text("disc.finding_shown", { number: place + 1 }));
  };
  const back = (place) => {
    state.mark(place);
    const entry = find(`#finding-${place}`);
    entry?.scrollIntoView({ block: "center" });
    entry?.focus({ preventScroll: true });
  };
  listen({ show, back }, drawn);
  state.subscribe("shown", draw);
  state.subscribe("marked", follow);
  chart.onRedraw(drawChart);
  draw();
}

// From a button of the list to the mark, which then has the focus; from a mark to its entry, by pointer or key.
function listen(deeds, drawn) {
  document.addEventListener("click", (event) => {
    const target = event.target.closest("[data-finding]");
    if (target === null) return;
    const place = Number(target.dataset.finding);
    if (target.tagName !== "BUTTON") return deeds.back(place);
    deeds.show(place);
    drawn.element.scrollIntoView({ block: "center" });
    drawn.marks.querySelector(`[data-finding="${place}"]`)?.focus({ preventScroll: true });
  });
  document.addEventListener("keydown", (event) => {
    const mark = event.target.closest("svg [data-finding]");
    if (mark === null || (event.key !== "Enter" && event.key !== " ")) return;
    event.preventDefault();
    deeds.back(Number(mark.dataset.finding));
  });
}

// Where a finding lies: places with what they are, points that hold them, and when they pass the row (null: never).
export function placesOf(finding, state) {
  const { movement, shown } = state;
  const { projections = [], tracks = [], radius_mm, angle_deg, sounds_s } = finding.at;
  if (projections.length) {
    return projections.map((index) => shown.projections[index]).filter(Boolean).map((one) => at(one.radius_mm, one.angle_deg, one.turned_deg));
  }
  if (angle_deg !== undefined) {
    const track = movement.tracks[(tracks[0] ?? 1) - 1];
    return [at(radius_mm ?? (tracks.length ? track.radius_mm : movement.rim_mm), angle_deg, turnedFor(angle_deg, track, movement))];
  }
  if (tracks.length) {
    return tracks.map((number) => whole(movement.tracks[number - 1].radius_mm));
  }
  if (sounds_s !== undefined) {
    const turned_deg = shown.turnedAt(sounds_s);
    const points = movement.tracks.map((track) => onDrawing(track.radius_mm, edgeAngle(turned_deg, track, movement)));
    return [{ kind: "moment", points, turned_deg }];
  }
  return radius_mm === undefined ? [] : [whole(radius_mm)];
}

const at = (radius_mm, angle_deg, turned_deg) => ({ kind: "place", radius_mm, turned_deg, points: [onDrawing(radius_mm, angle_deg)] });
const whole = (radius_mm) => ({
  kind: "circle",
  radius_mm,
  turned_deg: null,
  points: [0, 90, 180, 270].map((deg) => onDrawing(radius_mm, deg)),
});

// A line, and round it what a hand can hit.
const line = (d) => [svg("path", { d }), svg("path", { class: "reach", d })];

const mark = (place, state, ...children) =>
  svg(
    "g",
    {
      class: `mark ${state.layout.findings[place].level}`,
      "data-finding": place,
      role: "button",
      tabindex: "-1",
      "aria-label": text("disc.finding_mark", { number: place + 1 }),
    },
    children,
  );

function discMarks(place, state) {
  const places = placesOf(state.layout.findings[place], state);
  if (!places.length) return [];
  const shapes = places.map((one) => {
    if (one.kind === "circle") return line(circlePath(one.radius_mm));
    if (one.kind === "moment") return line(`M${one.points.map(([x, y]) => `${fine(x)} ${fine(y)}`).join("L")}`);
    return svg("circle", { class: "at", cx: fine(one.points[0][0]), cy: fine(one.points[0][1]), r: 1 });
  });
  return [mark(place, state, ...shapes.flat())];
}

function chartMarks(place, state, chart) {
  const shapes = placesOf(state.layout.findings[place], state).flatMap((one) => {
    const x = one.turned_deg === null ? null : fine(one.turned_deg * chart.pxPerDeg);
    if (one.kind === "circle") {
      const y = chart.yOf(one.radius_mm);
      return y < chart.top || y > chart.top + chart.high ? [] : line(`M0 ${fine(y)}H${fine(360 * chart.pxPerDeg)}`);
    }
    if (one.kind === "moment") return line(`M${x} ${chart.top}v${chart.high}`);
    const y = Math.min(chart.top + chart.high, Math.max(chart.top, chart.yOf(one.radius_mm)));
    return [svg("circle", { cx: x, cy: fine(y), r: 7 })];
  });
  return shapes.length ? [mark(place, state, ...shapes)] : [];
}
