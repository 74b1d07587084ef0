// What can be ruled for the thing that is chosen: its buttons, and the tracks it may be put on.
import { el, find } from "../dom.js";
import { text } from "../texts.js";
import { leaveOut, mustSound, notesOf, octaveTrack, placeOn, rulingsFor, tracksFor, without } from "./settings.js";
import { noteName, rulingWords, trackWords } from "./words.js";

const button = (words, deed, id) => el("button", { type: "button", class: "plain", id, onclick: deed }, words);

// `rule(settings, words)` asks for a layout with these settings; the words say what was ruled.
export function drawChoices(state, settings, rule) {
  const thing = state.chosen;
  const notes = thing === null ? [] : notesOf(thing);
  const place = find("#ruling-choices");
  if (!notes.length) {
    find("#ruling-for").textContent = text(thing === null ? "rulings.for_none" : "rulings.for_extra");
    place.replaceChildren();
    return;
  }
  const name = noteName(notes[0], state.layout);
  find("#ruling-for").textContent = text(notes.length > 1 ? "rulings.for_several" : "rulings.for", { name, count: notes.length });
  const context = { state, thing, notes, name, settings, rule };
  place.replaceChildren(el("div", { class: "tools" }, deeds(context)), tracks(context));
}

function deeds({ state, thing, notes, name, settings, rule }) {
  const { layout, movement } = state;
  const made = [];
  const own = rulingsFor(settings, notes);
  const has = (deed) => own.some((ruling) => ruling.do === deed);
  if (own.length) {
    const words = rulingWords(own[0], layout, movement);
    made.push(button(text("rulings.take_back"), () => rule(without(settings, notes), text("rulings.did_back", { words })), "rule-back"));
  }
  if (thing.kind === "projection") {
    made.push(button(text("rulings.take_out"), () => rule(leaveOut(settings, notes), text("rulings.is_out", { name })), "rule-out"));
  }
  if (!has("must-sound")) {
    made.push(button(text("rulings.must"), () => rule(mustSound(settings, notes), text("rulings.is_must", { name })), "rule-must"));
  }
  for (const [step, key] of [[1, "up"], [-1, "down"]]) {
    const track = octaveTrack(thing, step, layout, movement);
    if (track) made.push(button(text(`rulings.octave_${key}`, { pitch: track.pitch }), () => put(track, { notes, name, settings, rule }), `rule-${key}`));
  }
  return made;
}

const put = (track, { notes, name, settings, rule }) =>
  rule(placeOn(settings, notes, track.track), text("rulings.is_placed", { name, track: track.track, pitch: track.pitch }));

function tracks(context) {
  const { state, thing, notes } = context;
  const offered = tracksFor(notes[0], state.layout, state.movement);
  if (!offered.length) return el("p", { class: "quiet" }, text("rulings.no_track"));
  const select = el("select", { id: "rule-track" }, offered.map((track) =>
    el("option", { value: track.track, selected: thing.kind === "projection" && track.track === thing.track }, trackWords(track))));
  const chosen = () => offered.find((track) => track.track === Number(select.value));
  return el(
    "div",
    { class: "put" },
    el("label", { for: "rule-track" }, text("rulings.tracks")),
    select,
    button(text("rulings.put"), () => put(chosen(), context), "rule-put"),
  );
}
