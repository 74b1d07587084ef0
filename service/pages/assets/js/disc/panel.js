// What is told of the projection or left-out note that is pointed at or chosen.
import { el, find } from "../dom.js";
import { text } from "../texts.js";
import { barAt } from "./placing.js";

const LEAST_NUDGE_MS = 0.05;

export function openPanel(state) {
  const panel = find("#pointed");
  const none = panel.firstElementChild;
  const brief = find("#brief"); // where the panel stands below the screen
  const show = () => {
    const thing = state.pointed ?? state.chosen;
    brief.textContent = thing === null ? none.textContent : labelOf(thing, state);
    delete panel.dataset.thing;
    if (thing === null) return panel.replaceChildren(none);
    const rows = thing.kind === "projection" ? projectionRows(thing, state) : leftOutRows(thing, state);
    panel.replaceChildren(
      el("dl", { class: "facts" }, rows.flatMap(([name, value]) => [el("dt", {}, text(`disc.row_${name}`)), el("dd", {}, value)])),
    );
    panel.dataset.thing = `${thing.kind} ${thing.index}`;
  };
  for (const subject of ["pointed", "chosen", "shown"]) state.subscribe(subject, show);
}

// What a projection or a left-out note is called by who cannot see it.
export function labelOf(thing, state) {
  if (thing.kind === "left_out") {
    return text("disc.left_out_label", { pitch: thing.pitch, s: thing.asked_s.toFixed(2), reason: reasonOf(thing) });
  }
  return text("disc.projection_label", {
    pitch: thing.pitch,
    s: thing.sounds_s.toFixed(2),
    track: thing.track,
    number: thing.place + 1,
    count: state.shown.projections.length,
  });
}

const reasonOf = (thing) => text(`disc.reason_${thing.reason.replaceAll("-", "_")}`);
const moment = (s, thing, state) =>
  text("disc.row_sounds_value", { s: s.toFixed(3), bar: barAt(state.shown, thing.turned_deg) ?? "–" });

function projectionRows(thing, state) {
  const track = state.movement.tracks[thing.track - 1];
  const teeth = track.teeth.map(toothOf).join(", ") || "–";
  const nudge_ms = 1000 * (thing.sounds_s - thing.asked_s);
  const rows = [
    ["note", thing.pitch],
    ["sounds", moment(thing.sounds_s, thing, state)],
    ["nudge", nudgeOf(nudge_ms)],
    [track.teeth.length > 1 ? "teeth" : "tooth", teeth],
    ["place", placeOf(thing)],
  ];
  if (thing.octave_semitones) rows.push(["octave", text("disc.row_octave_value", { semitones: signed(thing.octave_semitones) })]);
  if (thing.again_of !== undefined) rows.push(["again", text("disc.row_again_value", { number: numberOf(thing.again_of, state) })]);
  const voices = new Set(thing.notes.map((note) => state.layout.notes[note].voice).filter((voice) => voice !== null));
  if (voices.size) rows.push(["voice", [...voices].map((voice) => text(`disc.voice_${voice}`)).join(", ")]);
  if (thing.notes.length > 1) rows.push(["plays", text("disc.row_plays_value", { count: thing.notes.length })]);
  return rows;
}

function leftOutRows(thing, state) {
  const rows = [
    ["note", thing.pitch],
    ["asked", moment(thing.asked_s, thing, state)],
    ["why", text("disc.row_why_value", { reason: reasonOf(thing) })],
  ];
  if (thing.voice) rows.push(["voice", text(`disc.voice_${thing.voice}`)]);
  return rows;
}

// `again_of` is a note; the projection that plays it first is what a person can find.
function numberOf(note, state) {
  const first = state.shown.byTime.find((one) => one.again_of === undefined && one.notes.includes(note));
  return first ? first.place + 1 : "–";
}

const signed = (value) => (value > 0 ? `+${value}` : `−${-value}`);

function nudgeOf(ms) {
  if (Math.abs(ms) < LEAST_NUDGE_MS) return text("disc.row_nudge_none");
  return text(ms > 0 ? "disc.row_nudge_late" : "disc.row_nudge_early", { ms: Math.abs(ms).toFixed(1) });
}

function placeOf(thing) {
  return text("disc.row_place_value", {
    track: thing.track,
    radius: thing.radius_mm.toFixed(2),
    angle: thing.angle_deg.toFixed(2),
  });
}

function toothOf({ tooth, cents, damped }) {
  const key = `disc.tooth${cents ? "_cents" : ""}${damped ? "" : "_undamped"}`;
  return text(key, cents ? { tooth, cents: signed(cents) } : { tooth });
}
