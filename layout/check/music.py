"""Checks on what the disc plays of the tune."""

import math

from layout.arrange.arrangement import Arrangement
from layout.check.finding import Code, Finding, Level, Place
from layout.place.disc import Disc

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


def music_fits_the_turn(arrangement: Arrangement, disc: Disc) -> list[Finding]:
    """An error where notes of the passage lie past the free part of the turn."""
    past = sum(note.reason == "past-the-turn" for note in arrangement.left_out)
    falls = "note falls" if past == 1 else "notes fall"
    free_s = disc.turning.free_turn_s
    if not past:
        return []
    # Rounded up: rounded to nearest, the factor named would not fit half of the time.
    fits_at = math.ceil(arrangement.speed_factor * arrangement.length_s / free_s * 1000 - 1e-6) / 1000
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
            remedy=(
                "Choose a passage of the tune, or let it play faster: it fits the turn at "
                f"{fits_at:.3f} times as written (settings: passage, speed)."
            ),
        )
    ]
