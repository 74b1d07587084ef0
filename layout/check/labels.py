"""Checks of what is lettered on the disc."""

from layout.check.finding import Code, Finding, Level, Place
from layout.place.disc import Disc


def labels_are_seen(disc: Disc) -> list[Finding]:
    """One advice where labels stand on the star side, which nobody sees while the disc lies in its movement."""
    if not disc.cutter.labels or disc.cutter.drawn_from == "label-side":
        return []
    return [
        Finding(
            code=Code.LABEL_HIDDEN,
            level=Level.ADVICE,
            message=(
                f"{disc.cutter.id} marks the star side, the one it is drawn from; the labels cannot be read while the "
                "disc lies in its movement."
            ),
            measured=None,
            limit=None,
            unit="",
            at=Place(),
            remedy=(
                "If the machine can mark the label side, set drawn_from to it in the cutter document; else letter that "
                "side by hand, or set labels to false."
            ),
        )
    ]
