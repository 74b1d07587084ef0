// Rulings, tracks and differences in words.
import { text } from "../texts.js";
import { rulingsOf } from "./settings.js";

const MOST_NAMED = 6; // plucks; of more their number is told

export const signed = (value) => (value > 0 ? `+${value}` : value < 0 ? `−${-value}` : "0");

export function noteName(note, layout) {
  const told = layout.notes[note];
  return told ? text("rulings.note", { pitch: told.pitch, s: told.onset_s.toFixed(2) }) : text("rulings.note_unknown", { note });
}

export function rulingWords(ruling, layout, movement) {
  const name = noteName(ruling.note, layout);
  if (ruling.do !== "place") return text(ruling.do === "leave-out" ? "rulings.is_out" : "rulings.is_must", { name });
  const pitch = movement.tracks[ruling.track - 1]?.pitch ?? "–";
  return text("rulings.is_placed", { name, track: ruling.track, pitch });
}

export function trackWords(track) {
  const teeth = track.teeth.map(({ tooth }) => tooth).join(", ");
  const values = { pitch: track.pitch, track: track.track, teeth, octaves: signed(track.octaves) };
  return text(track.octaves ? "rulings.track_octaves" : "rulings.track", values);
}

// A difference as rows of words, most telling first; `before` and `after` are the layouts.
export function differenceRows(difference, before, after) {
  const rows = [];
  const [low, high] = difference.transposed;
  if (low !== high) rows.push({ kind: "transposed", words: text("rulings.transposed", { was: signed(low), is: signed(high) }) });
  for (const [kind, notes, layout] of [
    ["gone", difference.gone, before],
    ["added", difference.added, after],
    ["moved", difference.moved, after],
  ]) {
    if (notes.length) rows.push({ kind, words: text(`rulings.${kind}`, { count: notes.length, names: named(notes, layout) }) });
  }
  const [was, is] = difference.worth;
  rows.push({ kind: "worth", words: worthWords(was, is) });
  return rows;
}

function worthWords(was, is) {
  const grouped = (value) => value.toLocaleString("en-GB");
  if (was === is) return text("rulings.worth_same", { is: grouped(is) });
  const change = was ? signed(Number(((100 * (is - was)) / was).toPrecision(2))) : "–";
  return text("rulings.worth", { was: grouped(was), is: grouped(is), change });
}

function named(notes, layout) {
  const names = notes.slice(0, MOST_NAMED).map((note) => noteName(note, layout));
  if (notes.length > MOST_NAMED) names.push(text("rulings.and_more", { count: notes.length - MOST_NAMED }));
  return names.join("; ");
}

// A problem of the API by the ruling it is about: [{ ruling or null, words }].
export function faultsOf(told, settings) {
  const params = told.invalid_params ?? [];
  if (!params.length) return [{ ruling: null, words: told.detail || told.title }];
  return params.map(({ pointer, detail }) => {
    const found = /^\/rulings\/(\d+)/.exec(pointer);
    return { ruling: found ? rulingsOf(settings)[Number(found[1])] ?? null : null, words: detail };
  });
}
