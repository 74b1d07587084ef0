"""Checks of what is lettered on the disc."""

from layout.check.finding import Code, Finding, Level, Place
from layout.mechanics.plain_letters import is_mostly_lost
from layout.place.disc import Disc


def labels_are_seen(disc: Disc) -> list[Finding]:
    """One advice where labels stand on the star side, which nobody sees while the disc lies in its movement."""
    if not disc.cutter.labels or disc.cutter.drawn_from == "label-side":
        return []
    return [
        _advice(
            Code.LABEL_HIDDEN,
            message=(
                f"{disc.cutter.id} marks the star side, the one it is drawn from; the labels cannot be read while the "
                "disc lies in its movement."
            ),
            remedy=(
                "If the machine can mark the label side, set drawn_from to it in the cutter document; else letter that "
                "side by hand, or set labels to false."
            ),
        )
    ]


def labels_stand(disc: Disc, *, title: str, without_room: tuple[str, ...]) -> list[Finding]:
    """Advice where a label is missing from the disc: it fits nowhere, or its letters cannot be engraved.

    A disc without projections is not cut, so that nothing is missing from it.

    Args:
        disc: The disc.
        title: The tune's title.
        without_room: What is to be marked and fits nowhere, by its names.
    """
    if not disc.projection_count:
        return []
    side = disc.cutter.drawn_from.replace("-", " ")
    found = []
    if without_room:
        found.append(
            _advice(
                Code.LABEL_MISSING,
                message=f"There is no room on the disc for: {', '.join(without_room)}.",
                remedy=(
                    f"Mark the {side} by hand before the disc leaves the machine, in the words of the work sheet"
                    f"{_shorter(without_room)}."
                ),
            )
        )
    if disc.cutter.labels and is_mostly_lost(title):
        found.append(
            _advice(
                Code.LABEL_MISSING,
                message="The title is not lettered: more than half of its letters have no likeness among A to Z.",
                remedy=f"Give a title in Latin letters in the settings, or letter the {side} by hand.",
            )
        )
    return found


def _shorter(without_room: tuple[str, ...]) -> str:
    """What the settings can do about it: of all labels only these two are the maker's own words."""
    own = [name for name in ("title", "order number") if name in without_room]
    return f"; or try a shorter {' and '.join(own)} in the settings" if own else ""


def _advice(code: Code, *, message: str, remedy: str) -> Finding:
    return Finding(
        code=code, level=Level.ADVICE, message=message, measured=None, limit=None, unit="", at=Place(), remedy=remedy
    )
