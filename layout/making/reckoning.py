"""From a disc and its cut plan to what making it takes."""

import math

from layout.cut.plan import CutPath, CutPlan
from layout.documents.cutter import Cutter
from layout.documents.making import Feeds
from layout.making.making import Making, TimeParts
from layout.making.pricing import MINOR_UNIT_DECIMALS, Quantities, price_lines, total_of
from layout.making.timing import feeds_not_stated, sum_s, time_parts
from layout.making.weighing import blank_mass_kg, disc_mass_kg
from layout.mechanics.bending import over_bend_rad
from layout.mechanics.projection import fitting_tool
from layout.mechanics.punching import cutting_force_n, sheared_length_mm, stripping_force_n
from layout.place.disc import Disc

NOT_COUNTED_ON_A_PRESS = ("holes", "rim", "first tool")

_NO_FEEDS = Feeds()


def making_of(disc: Disc, plan: CutPlan) -> Making:
    """What making one disc takes: lengths, strokes, masses, time and price.

    Args:
        disc: The disc; one without projections is a bare blank, and told as one.
        plan: Its cut plan. Without a path, lengths, counts and time are None.

    Returns:
        The making; what a document does not state is named in `not_stated`, never guessed.
    """
    path, cutter = plan.path, disc.cutter
    parts = TimeParts() if path is None else time_parts(path, cutter.feeds or _NO_FEEDS)
    quantities = Quantities(
        time_s=sum_s(parts),
        pierce_count=None if path is None else path.pierce_count,
        hit_count=None if path is None else path.hit_count,
        blank_mass_kg=blank_mass_kg(disc),
    )
    rates = cutter.rates
    lines = () if rates is None else price_lines(quantities, rates)
    return Making(
        cut_length_mm=None if path is None else path.cut_length_mm,
        mark_length_mm=None if path is None else path.mark_length_mm,
        rapid_length_mm=None if path is None else path.rapid_length_mm,
        pierce_count=quantities.pierce_count,
        hit_count=quantities.hit_count,
        hit_force_n=_hit_force_n(disc),
        stripping_force_n=_stripping_force_n(disc),
        fold_to_rad=_fold_to_rad(disc),
        blank_mass_kg=quantities.blank_mass_kg,
        disc_mass_kg=disc_mass_kg(disc),
        time_parts=parts,
        time_s=quantities.time_s,
        price_lines=lines,
        total=None if rates is None else total_of(lines, quantities, rates),
        currency=None if rates is None else rates.currency,
        currency_decimals=None if rates is None else MINOR_UNIT_DECIMALS.get(rates.currency),
        not_stated=_not_stated(disc, path, parts),
        not_counted=NOT_COUNTED_ON_A_PRESS if cutter.kind == "punch-press" else (),
    )


def _hit_force_n(disc: Disc) -> float | None:
    blank, tool = disc.movement.disc, fitting_tool(disc.movement, disc.cutter)
    if tool is None or blank.shear_strength_n_per_mm2 is None:
        return None
    return cutting_force_n(sheared_length_mm(tool), blank.thickness_mm, blank.shear_strength_n_per_mm2)


def _stripping_force_n(disc: Disc) -> float | None:
    force_n, press = _hit_force_n(disc), disc.cutter.press
    return None if force_n is None or press is None else stripping_force_n(force_n, press.stripping_share)


def _fold_to_rad(disc: Disc) -> float | None:
    fold = disc.cutter.fold
    if disc.pattern.making != "fold" or fold is None or fold.springback is None:
        return None
    return over_bend_rad(math.radians(fold.springback.opens_deg))


def _not_stated(disc: Disc, path: CutPath | None, parts: TimeParts) -> tuple[str, ...]:
    names = [] if path is None else list(feeds_not_stated(parts))
    if disc.pattern.making == "fold" and _fold_to_rad(disc) is None:
        names.append("cutter.fold.springback")
    if fitting_tool(disc.movement, disc.cutter) is not None:
        names += ["movement.disc.shear_strength_n_per_mm2"] * (_hit_force_n(disc) is None)
        names += ["cutter.press"] * (disc.cutter.press is None)
    if disc.movement.disc.density_kg_m3 is None:
        names.append("movement.disc.density_kg_m3")
    return (*names, *_rates_not_stated(disc.cutter))


def _rates_not_stated(cutter: Cutter) -> tuple[str, ...]:
    if cutter.rates is None:
        return ("cutter.rates",)
    amounts = cutter.rates.model_dump(exclude={"currency"})
    return () if any(amount is not None for amount in amounts.values()) else ("cutter.rates.setup",)
