// The comb as it is written at the moment: pitches along, teeth of one pitch stacked, what the scale lacks left hollow.
import { el, svg } from "../dom.js";
import { text } from "../texts.js";

const [STEP, BOX, LEFT, TOP, FOOT, OCTAVE] = [24, 20, 8, 8, 40, 12]; // as the page of a movement draws it
const STEPS = { C: 0, D: 2, E: 4, F: 5, G: 7, A: 9, B: 11 };
const NAMES = ["C", "C#", "D", "Eb", "E", "F", "F#", "G", "G#", "A", "Bb", "B"];
const worded = (name, values) => text(`movements.${name}`, values);

// The MIDI key of a pitch's name, C4 = 60; null for none.
export function keyOf(pitch) {
  const match = /^([A-G])([#b]?)(-1|[0-9])$/.exec(pitch ?? "");
  return match && OCTAVE * (Number(match[3]) + 1) + STEPS[match[1]] + { "#": 1, b: -1, "": 0 }[match[2]];
}

export function combOf(desk, path) {
  const holder = el("div", { class: "comb-live wide", role: "img" });
  let last = null;
  const draw = () => {
    const teeth = desk.valueAt(path);
    const now = JSON.stringify(teeth);
    if (now === last) return;
    last = now;
    const { picture, words } = drawn(Array.isArray(teeth) ? teeth : []);
    holder.replaceChildren(picture);
    holder.setAttribute("aria-label", words);
  };
  desk.watch(holder, { sum: draw });
  return holder;
}

function drawn(teeth) {
  const known = teeth.map((tooth) => ({ ...tooth, key: keyOf(tooth?.pitch) })).filter((tooth) => tooth.key !== null);
  if (!known.length) return { picture: el("p", { class: "quiet" }, worded("comb_none")), words: worded("comb_none") };
  const keys = known.map((tooth) => tooth.key);
  const [low, high] = [Math.min(...keys), Math.max(...keys)];
  const all = Array.from({ length: high - low + 1 }, (_, place) => low + place);
  const byKey = new Map(all.map((key) => [key, known.filter((tooth) => tooth.key === key)]));
  const foot = TOP + STEP * Math.max(...[...byKey.values()].map((found) => found.length));
  const [width, height] = [2 * LEFT + STEP * all.length, foot + FOOT];
  const marks = all.flatMap((key, along) => column(key, byKey.get(key), { x: LEFT + STEP * along, foot }));
  const picture = svg("svg", { class: "comb", viewBox: `0 0 ${width} ${height}`, width, height, "aria-hidden": "true" }, marks);
  const gaps = all.filter((key) => !byKey.get(key).length).length;
  const pitches = all.length - gaps;
  return { picture, words: worded("comb_live", { teeth: known.length, pitches, gaps }) };
}

function column(key, teeth, { x, foot }) {
  const name = NAMES[key % OCTAVE];
  const boxes = teeth.map((tooth, place) => {
    const y = foot - STEP * (place + 1);
    const look = tooth.usable === false ? "unusable" : tooth.damped === false ? "undamped" : "damped";
    return svg(
      "g",
      { class: `tooth ${look}` },
      svg("rect", { x, y, width: BOX, height: BOX }),
      svg("text", { x: x + BOX / 2, y: y + 14 }, String(tooth.track ?? "")),
    );
  });
  const gap = teeth.length ? [] : [svg("rect", { class: "gap", x, y: foot - STEP, width: BOX, height: BOX })];
  const octave = name === "C" ? [svg("text", { class: "octave", x: x + BOX / 2, y: foot + 32 }, `C${Math.floor(key / OCTAVE) - 1}`)] : [];
  return [...boxes, ...gap, svg("text", { class: "pitch", x: x + BOX / 2, y: foot + 14 }, name), ...octave];
}
