"""From a disc and its cut plan to what making it takes."""

import math

from layout.cut.plan import CutPath, CutPlan
from layout.documents.cutter import Cutter, Tool
from layout.documents.making import Feeds
from layout.making.making import Making, TimeParts, ToolWork
from layout.making.pricing import MINOR_UNIT_DECIMALS, Quantities, price_lines, total_of
from layout.making.timing import feeds_not_stated, sum_s, time_parts
from layout.making.weighing import blank_mass_kg, disc_mass_kg
from layout.mechanics.bending import over_bend_rad
from layout.mechanics.projection import fitting_tool
from layout.mechanics.punching import cutting_force_n, press_force_n, sheared_length_mm, stripping_force_n
from layout.place.disc import Disc

FIRST_TOOL = "first tool (in the press already)"
PROJECTIONS = "projections (no tool of that size)"

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
    tools = _tool_works(disc, plan)
    lines = () if rates is None else price_lines(quantities, rates)
    return Making(
        cut_length_mm=None if path is None else path.cut_length_mm,
        mark_length_mm=None if path is None else path.mark_length_mm,
        rapid_length_mm=None if path is None else path.rapid_length_mm,
        pierce_count=quantities.pierce_count,
        hit_count=quantities.hit_count,
        hit_force_n=_hit_force_n(disc),
        stripping_force_n=_stripping_force_n(disc),
        press_force_n=_greatest(tuple(work.press_force_n for work in tools)),
        tool_change_count=None if path is None else path.tool_change_count,
        tools=tools,
        fold_to_rad=_fold_to_rad(disc),
        blank_mass_kg=quantities.blank_mass_kg,
        disc_mass_kg=disc_mass_kg(disc),
        time_parts=parts,
        time_s=quantities.time_s,
        price_lines=lines,
        total=None if rates is None else total_of(lines, quantities, rates),
        currency=None if rates is None else rates.currency,
        currency_decimals=None if rates is None else MINOR_UNIT_DECIMALS.get(rates.currency),
        not_stated=_not_stated(disc, path, parts, tools),
        not_counted=_not_counted(disc, plan, tools),
    )


def _tool_works(disc: Disc, plan: CutPlan) -> tuple[ToolWork, ...]:
    """What each tool does, in the order taken up."""
    counts = [(hits.tool, len(hits.at_mm)) for hits in plan.hole_hits]
    if plan.tool and len(plan.order):
        counts.append((plan.tool, len(plan.order)))
    tools, press = {tool.tool: tool for tool in disc.cutter.tools}, disc.cutter.press
    works = []
    for name, count in counts:
        force_n = _force_n(disc, tools[name])
        pressed_n = None if force_n is None or press is None else press_force_n(force_n, press.stripping_share)
        works.append(ToolWork(tool=name, hit_count=count, hit_force_n=force_n, press_force_n=pressed_n))
    return tuple(works)


def _greatest(forces_n: tuple[float | None, ...]) -> float | None:
    told = [force_n for force_n in forces_n if force_n is not None]
    return max(told) if told and len(told) == len(forces_n) else None


def _not_counted(disc: Disc, plan: CutPlan, tools: tuple[ToolWork, ...]) -> tuple[str, ...]:
    if disc.cutter.kind == "laser":
        return ()
    left = [PROJECTIONS] if len(plan.order) and not plan.tool else []
    return (*left, *plan.not_struck, *([FIRST_TOOL] if tools else []))


def _hit_force_n(disc: Disc) -> float | None:
    tool = fitting_tool(disc.movement, disc.cutter)
    return None if tool is None else _force_n(disc, tool)


def _force_n(disc: Disc, tool: Tool) -> float | None:
    blank = disc.movement.disc
    if blank.shear_strength_n_per_mm2 is None:
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


def _not_stated(disc: Disc, path: CutPath | None, parts: TimeParts, tools: tuple[ToolWork, ...]) -> tuple[str, ...]:
    names = [] if path is None else list(feeds_not_stated(parts))
    if disc.pattern.making == "fold" and _fold_to_rad(disc) is None:
        names.append("cutter.fold.springback")
    if tools:
        no_strength = disc.movement.disc.shear_strength_n_per_mm2 is None
        names += ["movement.disc.shear_strength_n_per_mm2"] * no_strength
        names += ["cutter.press"] * (disc.cutter.press is None)
    if disc.movement.disc.density_kg_m3 is None:
        names.append("movement.disc.density_kg_m3")
    return (*names, *_rates_not_stated(disc.cutter))


def _rates_not_stated(cutter: Cutter) -> tuple[str, ...]:
    if cutter.rates is None:
        return ("cutter.rates",)
    amounts = cutter.rates.model_dump(exclude={"currency"})
    return () if any(amount is not None for amount in amounts.values()) else ("cutter.rates.setup",)
