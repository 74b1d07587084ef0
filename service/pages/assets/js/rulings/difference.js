// What is different between two layouts of one tune: plucks that are gone, that are new, that moved.
const SAME_S = 0.0005; // half of what is told of a moment

// `before` and `after` are layouts. Gives notes: { gone, added, moved }, each by the first note of its pluck.
export function differenceOf(before, after) {
  const [old, now] = [played(before), played(after)];
  const stays = (note) => now.has(note);
  const moved = [...now].filter(([note, pluck]) => old.has(note) && isElsewhere(old.get(note), pluck));
  return {
    gone: once([...old].filter(([note]) => !stays(note)), old),
    added: once([...now].filter(([note]) => !old.has(note)), now),
    moved: once(moved, now),
    worth: [before.worth.kept, after.worth.kept],
    transposed: [before.transposed_semitones, after.transposed_semitones],
  };
}

export const isNone = ({ gone, added, moved }) => !gone.length && !added.length && !moved.length;

function played(layout) {
  const found = new Map();
  layout.projections.forEach((pluck) => {
    if (pluck.again_of === undefined) for (const note of pluck.notes) found.set(note, pluck);
  });
  return found;
}

const isElsewhere = (one, other) => one.track !== other.track || Math.abs(one.sounds_s - other.sounds_s) > SAME_S;

// Notes that are one pluck are told once.
function once(entries, plucks) {
  const seen = new Set();
  return entries.flatMap(([note]) => {
    const pluck = plucks.get(note);
    if (seen.has(pluck)) return [];
    seen.add(pluck);
    return [note];
  });
}
