// Rulings in a settings document: which there are for a note, and the document with one more or one less.
// All here is pure: settings are never changed, others are given.
import { keyOf } from "../disc/placing.js";

const OCTAVE = 12;

export const rulingsOf = (settings) => settings.rulings ?? [];

// The rulings of these notes.
export const rulingsFor = (settings, notes) => rulingsOf(settings).filter((ruling) => notes.includes(ruling.note));

const withRulings = (settings, rulings) => {
  const { rulings: _, ...rest } = settings;
  return rulings.length ? { ...rest, rulings } : rest;
};

export const without = (settings, notes) =>
  withRulings(settings, rulingsOf(settings).filter((ruling) => !notes.includes(ruling.note)));

// What was ruled for these notes before gives way.
export const ruled = (settings, notes, rulings) =>
  withRulings(settings, [...rulingsOf(without(settings, notes)), ...rulings]);

export const leaveOut = (settings, notes) => ruled(settings, notes, notes.map((note) => ({ note, do: "leave-out" })));
// Notes that are one pluck sound together: the first speaks for all.
export const mustSound = (settings, notes) => ruled(settings, notes, [{ note: notes[0], do: "must-sound" }]);
export const placeOn = (settings, notes, track) => ruled(settings, notes, [{ note: notes[0], do: "place", track }]);

export const holdsPitch = (settings) => settings.transpose?.mode === "fixed";

// The same settings with the tune held at a transposition, or let go: then as `first` had it, or the best of all.
export function held(settings, semitones) {
  return { ...settings, transpose: { mode: "fixed", semitones } };
}

export function letGo(settings, first) {
  const { transpose: _, ...rest } = settings;
  return first.transpose && !holdsPitch(first) ? { ...rest, transpose: first.transpose } : rest;
}

// The notes that a projection or a left-out note stands for; none for a pluck that is written nowhere.
export const notesOf = (thing) => (thing.kind === "left_out" ? [thing.note] : thing.notes);

// The tracks on which a note may be put: those of its pitch in any octave, the nearest octave first.
export function tracksFor(note, layout, movement) {
  const key = keyOf(layout.notes[note].pitch) + layout.transposed_semitones;
  return movement.tracks
    .map((track, place) => ({ ...track, track: place + 1, octaves: (track.key - key) / OCTAVE }))
    .filter((track) => track.key !== null && track.teeth.length && Number.isInteger(track.octaves))
    .sort((a, b) => Math.abs(a.octaves) - Math.abs(b.octaves) || a.track - b.track);
}

// The first track an octave up (+1) or down (−1) from where a note is, or would be; null where there is none.
export function octaveTrack(thing, step, layout, movement) {
  const notes = notesOf(thing);
  if (!notes.length) return null;
  const offered = tracksFor(notes[0], layout, movement);
  const here = thing.kind === "projection" ? offered.find((track) => track.track === thing.track)?.octaves ?? 0 : 0;
  return offered.find((track) => track.octaves === here + step) ?? null;
}
