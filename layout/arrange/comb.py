"""The comb as arranging sees it: which tracks sound a key."""

from collections import defaultdict
from dataclasses import dataclass

from layout.documents.movement import Movement
from layout.documents.pitch import key_of


@dataclass(frozen=True, slots=True, kw_only=True)
class Comb:
    """Keys and tracks.

    Attributes:
        tracks_of_key: The tracks, from 0, innermost first, on which a usable tooth has the key.
        key_of_track: The key of each track with a usable tooth.
        unusable_keys: Keys that only unusable teeth have.
        track_count: All tracks, those without usable teeth included.
    """

    tracks_of_key: dict[int, tuple[int, ...]]
    key_of_track: dict[int, int]
    unusable_keys: frozenset[int]
    track_count: int


def comb_of(movement: Movement) -> Comb:
    """The movement's comb. A track with several teeth counts once; it plucks them all."""
    key_of_track = {tooth.track - 1: key_of(tooth.pitch) for tooth in movement.teeth if tooth.usable}
    tracks: dict[int, list[int]] = defaultdict(list)
    for track, key in sorted(key_of_track.items()):
        tracks[key].append(track)
    unusable = {key_of(tooth.pitch) for tooth in movement.teeth if not tooth.usable}
    return Comb(
        tracks_of_key={key: tuple(places) for key, places in tracks.items()},
        key_of_track=key_of_track,
        unusable_keys=frozenset(unusable - set(tracks)),
        track_count=len(movement.tracks),
    )
