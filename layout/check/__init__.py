"""Check: what is wrong, or near to wrong, with a disc, each with its number, limit, place and remedy."""

from collections.abc import Callable

from layout.arrange.arrangement import Arrangement
from layout.check.blank import (
    keep_outs_are_clear,
    tracks_are_on_the_disc,
    webs_to_features_hold,
    webs_to_the_centre_hole_hold,
    webs_to_the_rim_hold,
)
from layout.check.cutter import cutter_can_form, holes_are_large_enough, press_has_the_tool, slits_are_wide_enough
from layout.check.drive import (
    drive_carries_the_teeth,
    music_waits_for_the_speed,
    tempo_holds,
    train_gives_the_turn,
    winding_lasts,
)
from layout.check.feature_sizes import features_suit_the_sheet
from layout.check.finding import Code, Finding, Level, Place, stands
from layout.check.forming import bends_are_wide_enough, bends_lie_across_the_rolling
from layout.check.kerf import nothing_closes_under_the_kerf
from layout.check.labels import labels_are_seen
from layout.check.leads import bridges_have_room, leads_have_room
from layout.check.music import WholeTune, music_fits_the_turn, something_plays
from layout.check.net_section import metal_holds_along_rays_and_rings
from layout.check.press import feet_stand_on_flat_metal, hits_fall_on_whole_metal, press_is_strong_enough
from layout.check.repeats import dampers_recover, plucks_lie_in_the_music, rest_is_clear, star_wheels_keep_up
from layout.check.sideways import neighbours_are_not_fouled, own_star_is_met
from layout.check.star_wheel import (
    depth_stays_off_the_root,
    star_clears_the_disc,
    star_is_reached,
    step_ends_at_the_next_point,
    step_reaches_the_next_point,
    tip_clears_the_bend,
    tooth_is_released,
)
from layout.check.timing import fast_passages_are_held
from layout.check.webs import webs_between_openings_hold
from layout.place.disc import Disc

__all__ = ["Code", "Finding", "Level", "Place", "WholeTune", "check", "stands"]

DISC_CHECKS: tuple[Callable[[Disc], list[Finding]], ...] = (
    cutter_can_form,
    press_has_the_tool,
    slits_are_wide_enough,
    holes_are_large_enough,
    nothing_closes_under_the_kerf,
    leads_have_room,
    bridges_have_room,
    bends_are_wide_enough,
    bends_lie_across_the_rolling,
    labels_are_seen,
    star_clears_the_disc,
    star_is_reached,
    step_ends_at_the_next_point,
    step_reaches_the_next_point,
    tip_clears_the_bend,
    depth_stays_off_the_root,
    tooth_is_released,
    neighbours_are_not_fouled,
    own_star_is_met,
    tracks_are_on_the_disc,
    webs_to_the_rim_hold,
    webs_to_the_centre_hole_hold,
    webs_to_features_hold,
    keep_outs_are_clear,
    webs_between_openings_hold,
    features_suit_the_sheet,
    metal_holds_along_rays_and_rings,
    press_is_strong_enough,
    hits_fall_on_whole_metal,
    feet_stand_on_flat_metal,
    star_wheels_keep_up,
    dampers_recover,
    plucks_lie_in_the_music,
    rest_is_clear,
    music_waits_for_the_speed,
    drive_carries_the_teeth,
    winding_lasts,
    tempo_holds,
    train_gives_the_turn,
)


def check(disc: Disc, arrangement: Arrangement | None = None, whole: WholeTune | None = None) -> tuple[Finding, ...]:
    """Every finding on a disc, in the order of the checks, by place within each.

    A disc without projections has one finding: nothing plays.

    Args:
        disc: The disc.
        arrangement: What it was placed from; None for a disc read back from a drawing.
        whole: What all discs of its set play, so that one too long tells how many it takes.
    """
    of_music = something_plays(arrangement, disc)
    if arrangement is not None:
        of_music += music_fits_the_turn(arrangement, disc, whole)
    if not disc.projection_count:
        return tuple(of_music)
    found = [finding for one_check in DISC_CHECKS for finding in one_check(disc)]
    if arrangement is not None:
        found += fast_passages_are_held(arrangement, disc)
    return tuple(of_music + found)
