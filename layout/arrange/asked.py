"""What the chooser is asked and what it answers: the seam behind which one chooser replaces another.

`Asked` is one transposition of the tune on one comb. A chooser puts every pluck on at most one
of its tracks and keeps the rules of `Spacing`; layout.arrange.choose holds the present one.
"""

from collections.abc import Callable, Mapping
from dataclasses import dataclass

from layout.mechanics.arrays import BoolArray, FloatArray, IntArray
from layout.mechanics.spacing import Reason, Spacing
from layout.mechanics.turning import Turning

NO_TRACK = -1  # stands in an array of track places where there is none


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Asked:
    """The plucks asked for at one transposition, in the order (asked_s, key).

    No two plucks have one key at one moment. A key without tracks cannot be played; its plucks
    stand here all the same, so that pluck numbers are those of the tune.

    Attributes:
        asked_s: Shape (n,). The moment asked for, from the start of the music on the disc.
        key: Shape (n,). MIDI key number after transposition; may lie outside 0 to 127.
        weight: Shape (n,). Worth of the pluck, above 0.
        must_sound: Shape (n,). Whether a ruling forbids to leave it out.
        on_track: Shape (n,). The track a ruling puts it on, from 0, or NO_TRACK.
        tracks_of_key: The tracks that sound a key, from 0, innermost first; no entry for none.
    """

    asked_s: FloatArray
    key: IntArray
    weight: IntArray
    must_sound: BoolArray
    on_track: IntArray
    tracks_of_key: Mapping[int, tuple[int, ...]]

    def tracks(self, pluck: int) -> tuple[int, ...]:
        """The tracks that may sound a pluck, innermost first; one where a ruling names it."""
        if self.on_track[pluck] != NO_TRACK:
            return (int(self.on_track[pluck]),)
        return self.tracks_of_key.get(int(self.key[pluck]), ())


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Chosen:
    """A choice that keeps every rule and leaves out no pluck that would still fit.

    Attributes:
        track_index: Shape (n,). The track of each pluck, from 0, or NO_TRACK where left out.
        bound: No choice for the same `Asked` keeps more weight; equal to the weight kept where
            the chooser has proved its choice the best.
    """

    track_index: IntArray
    bound: int


@dataclass(frozen=True, slots=True, kw_only=True)
class Conflict:
    """What forbids a pluck on a track: the pluck it comes too near to, how near, and by which rule.

    Attributes:
        track_index: The track the pluck would stand on, from 0.
        other: The other pluck; the pluck itself where one turn is shorter than the track's repeat.
        other_track_index: The track the other stands on.
        apart_rad: Angle between the two working edges, from 0 to π on two tracks, else to 2π.
        reason: The rule.
    """

    track_index: int
    other: int
    other_track_index: int
    apart_rad: float
    reason: Reason


@dataclass(frozen=True, slots=True, kw_only=True)
class Clash:
    """Plucks that rulings force onto the disc and that have no room there together.

    Attributes:
        pluck: The pluck for which no room was left.
        conflict: What stands nearest in its way.
    """

    pluck: int
    conflict: Conflict


Choose = Callable[[Asked, Turning, Spacing], Chosen | Clash]
