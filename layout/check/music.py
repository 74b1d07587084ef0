"""Checks on what the disc plays of the tune."""

import math
from dataclasses import dataclass

from layout.arrange.arrangement import Arrangement
from layout.check.finding import Code, Finding, Level, Place
from layout.documents.settings import MOST_DISCS
from layout.mechanics.arrays import FloatArray
from layout.mechanics.filling import least_turn_s, turns_filled
from layout.place.disc import Disc

_ON_TIME_S = 1e-9  # an onset this much past the turn is still in it: rounding, not music

_EMPTY = {True: "the drawing has no projections", False: "the tune holds no notes but percussion"}


def something_plays(arrangement: Arrangement | None, disc: Disc) -> list[Finding]:
    """An error where the disc plays not one note."""
    if disc.projection_count:
        return []
    reasons = sorted({note.reason for note in arrangement.left_out}) if arrangement is not None else []
    why = f"every note is left out ({', '.join(reasons)})" if reasons else _EMPTY[arrangement is None]
    return [
        Finding(
            code=Code.NOTHING_TO_PLAY,
            level=Level.ERROR,
            message=f"Nothing on this disc would sound on {disc.movement.id}: {why}.",
            measured=0.0,
            limit=1.0,
            unit="",
            at=Place(),
            remedy="Choose another passage, transposition or movement, or check that the right tune was sent.",
        )
    ]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class WholeTune:
    """What is asked for on all discs of a set together; of one disc alone, on it.

    Attributes:
        onset_s: Shape (n,). Moments of the notes asked for, in the tune's own time, rising.
        from_s: Where the first disc's music begins, in the tune's own time; not after onset_s[0].
        disc_count: How many discs are made.
    """

    onset_s: FloatArray
    from_s: float
    disc_count: int


def music_fits_the_turn(arrangement: Arrangement, disc: Disc, whole: WholeTune | None = None) -> list[Finding]:
    """An error where notes of the passage lie past the free part of the turn.

    Args:
        arrangement: What the disc plays.
        disc: The disc.
        whole: What all discs play, to tell how many would do; None for one disc alone, of which then
            only the length counts.
    """
    past = sum(note.reason == "past-the-turn" for note in arrangement.left_out)
    falls = "note falls" if past == 1 else "notes fall"
    free_s = disc.turning.free_turn_s
    if not past:
        return []
    return [
        Finding(
            code=Code.MUSIC_TOO_LONG,
            level=Level.ERROR,
            message=(
                f"The music lasts {arrangement.length_s:.2f} s from its first to its last note; one turn of "
                f"{disc.movement.id} has {free_s:.2f} s for it, so {past} {falls} past the turn."
            ),
            measured=arrangement.length_s,
            limit=free_s,
            unit="s",
            at=Place(sounds_s=free_s),
            remedy=_what_fits(arrangement, free_s, whole),
        )
    ]


def _what_fits(arrangement: Arrangement, free_s: float, whole: WholeTune | None) -> str:
    speed = arrangement.speed_factor
    if whole is None:
        made, least_s = 1, speed * arrangement.length_s
        # A turn begins with an onset, so as many turns as the length has of them always do.
        needed = math.ceil(arrangement.length_s / (free_s + _ON_TIME_S))
    else:
        onset_s, made = whole.onset_s.tolist(), whole.disc_count
        least_s = least_turn_s(onset_s, whole.from_s, made)
        turn_s = max(speed * (free_s + _ON_TIME_S), onset_s[0] - whole.from_s)
        needed = turns_filled(onset_s, whole.from_s, turn_s).turn_count
    needed = max(needed, made + 1)
    # Rounded up: rounded to nearest, the factor named would not fit half of the time.
    fits_at = math.ceil(least_s / free_s * 1000 - 1e-6) / 1000
    turns = "the turn" if made == 1 else f"{made} turns"
    more = "" if made == 1 else f" instead of {made}"
    cut = f"Cut the tune over {needed} discs{more} (settings: discs), or choose"
    if needed > MOST_DISCS:
        cut = f"It would take {needed} discs, more than the {MOST_DISCS} there can be; choose"
    return (
        f"{cut} a passage of it (passage), or let it play faster: it fits {turns} at {fits_at:.3f} times as "
        f'written (speed: mode "fit", with most at {fits_at:.3f} or above).'
    )
