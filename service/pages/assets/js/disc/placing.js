// Where everything of a layout lies: on the disc, in the turn, on its track. Formulas: layout/mechanics/turning.py.
const RAD = Math.PI / 180;
const STEPS = { C: 0, D: 2, E: 4, F: 5, G: 7, A: 9, B: 11 };
const ALTERS = { "": 0, "#": 1, b: -1 };

// The MIDI key a pitch names: "C4" is 60.
export function keyOf(pitch) {
  const [, letter, alter, octave] = /^([A-G])([#b]?)(-?\d+)$/.exec(pitch);
  return 12 * (Number(octave) + 1) + STEPS[letter] + ALTERS[alter];
}

// A layout with places: `projections` and `leftOut` hold things that can be chosen; `byTime` all projections in the
// order in which they sound.
export function placed(layout, movement) {
  const turnedAt = (sounds_s) => movement.before_music_deg + (360 * sounds_s) / movement.revolution_s;
  const projections = layout.projections.map((projection, index) => {
    const track = movement.tracks[projection.track - 1];
    return {
      kind: "projection",
      index,
      ...projection,
      pitch: track.pitch,
      radius_mm: track.radius_mm,
      turned_deg: turnedAt(projection.sounds_s),
    };
  });
  const byTime = [...projections].sort((a, b) => a.turned_deg - b.turned_deg || a.track - b.track);
  byTime.forEach((projection, place) => { projection.place = place; });
  const bars = layout.bars.map((bar) => ({
    bar: bar.bar,
    tune_s: bar.start_s,
    turned_deg: turnedAt((bar.start_s - layout.from_s) / layout.speed_factor),
  }));
  return { projections, byTime, bars, leftOut: leftOutNotes(layout, movement, turnedAt), turnedAt };
}

// Notes left out that have a moment in the music of this disc, each on the track whose pitch is nearest.
function leftOutNotes(layout, movement, turnedAt) {
  const found = [];
  for (const { note, reason } of layout.left_out) {
    const told = layout.notes[note];
    const asked_s = (told.onset_s - layout.from_s) / layout.speed_factor;
    const turned_deg = turnedAt(asked_s);
    if (asked_s < -1e-6 || turned_deg > 360 - movement.after_music_deg + 1e-6) continue;
    const place = nearestTrack(movement.tracks, keyOf(told.pitch) + layout.transposed_semitones);
    if (place === null) continue;
    const track = movement.tracks[place];
    found.push({
      kind: "left_out",
      index: found.length,
      note,
      reason,
      pitch: told.pitch,
      voice: told.voice,
      asked_s,
      turned_deg,
      track: place + 1,
      radius_mm: track.radius_mm,
      angle_deg: edgeAngle(turned_deg, track, movement),
    });
  }
  return found;
}

function nearestTrack(tracks, key) {
  let best = null;
  tracks.forEach((track, place) => {
    if (track.key === null) return;
    if (best === null || Math.abs(track.key - key) < Math.abs(tracks[best].key - key)) best = place;
  });
  return best;
}

// Where a working edge lies on the disc that sounds when the disc has turned so far.
export const edgeAngle = (turned_deg, track, movement) => {
  const angle = movement.direction * turned_deg + track.release_deg;
  return ((angle % 360) + 360) % 360;
};

// How far the disc has turned when an edge at this angle on this track sounds.
export const turnedFor = (angle_deg, track, movement) => {
  const turned = movement.direction * (angle_deg - track.release_deg);
  return ((turned % 360) + 360) % 360;
};

// The bar that sounds at a moment of the disc's music; null before the first.
export function barAt(shown, turned_deg) {
  let found = null;
  for (const bar of shown.bars) {
    if (bar.turned_deg > turned_deg + 1e-6) break;
    found = bar.bar;
  }
  return found;
}

// A point of the disc in the drawing's frame, in which y goes down.
export const onDrawing = (radius_mm, angle_deg) => [
  radius_mm * Math.cos(angle_deg * RAD),
  -radius_mm * Math.sin(angle_deg * RAD),
];

// The extent of the opening: along the travel (u) and along the radius (v), in millimetres.
export function extents(pattern) {
  const us = pattern.points_mm.map(([u]) => u);
  const vs = pattern.points_mm.map(([, v]) => v);
  const round = pattern.making === "slot" ? pattern.width_mm / 2 : 0;
  return {
    from_u: Math.min(...us) - round,
    to_u: Math.max(...us) + round,
    from_v: Math.min(...vs),
    to_v: Math.max(...vs),
  };
}
