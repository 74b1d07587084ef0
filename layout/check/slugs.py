"""Checks of the bridges that hold slugs: whether they have room, and whether they stand on a fit."""

from layout.check.finding import Code, Finding, Level, Place
from layout.documents.making import SlugBridges
from layout.mechanics.slugs import HeldOpening, held_openings
from layout.place.disc import Disc


def slugs_are_held(disc: Disc) -> list[Finding]:
    """A warning for each kind of opening without room for its slug's bridges, which stays whole; advice for each fit.

    Nothing where the cutter states no bridges.slugs. A folded tab's channel is none of these openings: its slug is
    a strip of the slit's width less two kerfs, and a bridge would leave a stub on the tab or beside it.
    """
    slugs = None if disc.cutter.bridges is None else disc.cutter.bridges.slugs
    if slugs is None:
        return []
    findings = []
    for opening in held_openings(disc.pattern, disc.movement, disc.cutter):
        if opening.gaps is None:
            findings.append(_no_room(opening, slugs))
        elif opening.where == "anywhere":
            findings.append(_on_a_fit(opening, slugs))
    return findings


def _no_room(opening: HeldOpening, slugs: SlugBridges) -> Finding:
    clear = "" if opening.where == "anywhere" else ", clear of the sides that work,"
    return Finding(
        code=Code.BRIDGE_HAS_NO_ROOM,
        level=Level.WARNING,
        message=(
            f"The {opening.what} {_have(opening)} no room{clear} for {_bridges(slugs)} that would hold a slug of "
            f"{opening.slug_mm:.3f} mm. None is left, and the slug may tip up in the head's way."
        ),
        measured=None,
        limit=slugs.width_mm,
        unit="mm",
        at=Place(),
        remedy=(
            "State fewer or narrower bridges.slugs in the cutter document; or stop the machine and take the slug out."
        ),
    )


def _on_a_fit(opening: HeldOpening, slugs: SlugBridges) -> Finding:
    return Finding(
        code=Code.BRIDGE_ON_FIT,
        level=Level.ADVICE,
        message=(
            f"The {opening.what} {_have(opening)} no room for {_bridges(slugs)} away from where the spindle or pin "
            "fits, which is all round: they stand on the fit, and leave stubs there."
        ),
        measured=None,
        limit=slugs.width_mm,
        unit="mm",
        at=Place(),
        remedy=(
            "Stone the stubs flush before the fit is tried; or raise bridges.slugs.least_slug_mm above "
            f"{opening.slug_mm:.3f} mm, and take that slug out by hand."
        ),
    )


def _have(opening: HeldOpening) -> str:
    return "have" if opening.what.endswith("s") else "has"


def _bridges(slugs: SlugBridges) -> str:
    return f"{'a bridge' if slugs.count == 1 else f'{slugs.count} bridges'} of {slugs.width_mm:.3f} mm"
