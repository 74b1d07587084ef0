"""Checks of what drives the disc: its start, its heaviest chord, its winding, its turn.

All rest on what the movement states of its drive; what is not stated is not checked, and the report
names it. That star wheels may stand part-turned after a change of disc, so that a clearing turn does
the first notes good, is true of every disc: the report says it, and no finding.
"""

import math
from collections.abc import Callable
from dataclasses import replace

from layout.check.finding import Code, Finding, Level, Place
from layout.check.margin import GRAIN_MM, Condition, judged, told_worth
from layout.documents.drive import Drive, Winding
from layout.documents.movement import Movement
from layout.mechanics.starting import AT_SPEED_RATIO, Starting, starting_of
from layout.mechanics.torque import TurnTorque
from layout.mechanics.winding import (
    DiscLoad,
    WindingRun,
    WoundDrive,
    braked_revolution_s,
    gear_ratio,
    run_down,
    steady_turns,
    wound_drive_of,
)
from layout.place.disc import Disc

LEAST_TURNS = 1.0  # turns; a tune is one turn of the disc, and must not stop in it
ADVISED_TURNS = 2.0  # turns; one to clear star wheels left part-turned by the disc before, one to be heard
MOST_SLOWING_PERCENT = 2.5  # %; Friberg and Sundberg 1995 (JASA 98, 2524): just heard between notes over 240 ms apart
TURN_AGREES_PERCENT = 0.25  # %; a tenth of what is just heard, and what numbers written to three figures may leave
LOAD_GRAIN_NMM = 0.001  # N mm a tooth; arranging counts torques in whole thousandths

_DRIVE, _WINDING, _SPRING = "/drive", "/drive/winding", "/drive/winding/spring"
_PERCENT = 100.0
_LET_DOWN = "Let the spring down before any work on it, or have it done: a wound spring can hurt badly."


def music_waits_for_the_speed(disc: Disc) -> list[Finding]:
    """An error where music may begin before the disc has 99 % of its speed.

    Judged at the stated turn. At a faster one the disc needs more of its turn, and the first notes may then
    be a few hundredths slow, which is not heard; the report tells both angles. Where disc or train is
    not stated, only what is stated counts: what fails even so is certain.
    """
    movement = disc.movement
    starting = starting_of(movement, movement.revolution_s)
    if movement.drive is None or starting is None:
        return []
    needs_deg = math.degrees(starting.to_speed_rad)
    condition = Condition(
        code=Code.START_TOO_SHORT,
        says=(
            f"From rest the disc has {AT_SPEED_RATIO:.0%} of its speed after {'at least ' * starting.at_least}"
            f"{needs_deg:.3f}° ({starting.to_speed_s:.3f} s); music may begin after {movement.before_music_deg:.3f}°"
        ),
        so="the first notes come late and slow",
        measured=needs_deg,
        limit=movement.before_music_deg,
        unit="deg",
        margin=movement.before_music_deg - needs_deg,
        rests_on=("/before_music_deg",),
        also_unsure=needs_deg * _start_unsure_share(movement, movement.drive, starting),
        at=Place(angle_deg=movement.before_music_deg),
        remedy="Leave the disc a wider rest sector (before_music_deg), or correct the drive's inertia and torque.",
    )
    return judged(condition, movement)


def _start_unsure_share(movement: Movement, drive: Drive, starting: Starting) -> float:
    """By what share the angle of the start may be off, to first order: I/τ/T²."""
    inertia_kg_m2 = movement.plus_minus(f"{_DRIVE}/disc_inertia_kg_m2")
    for place, part in enumerate(drive.train):
        at = f"{_DRIVE}/train/{place}"
        inertia_kg_m2 += movement.plus_minus(f"{at}/inertia_kg_m2") * part.ratio * part.ratio
        inertia_kg_m2 += 2 * movement.plus_minus(f"{at}/ratio") * part.ratio * part.inertia_kg_m2
    return (
        inertia_kg_m2 / starting.inertia_kg_m2
        + movement.plus_minus(f"{_DRIVE}/surplus_torque_nmm") / (drive.surplus_torque_nmm or math.inf)
        + 2 * movement.plus_minus("/revolution_s") / movement.revolution_s
    )


def drive_carries_the_teeth(disc: Disc) -> list[Finding]:
    """An error where the lifted teeth load the disc beyond the drive's torque limit.

    Counted from the working edges alone, at the moments they sound, nudges included, so that a drawing
    read back is judged like a fresh layout. It is an error too where the settings ignored the limit:
    such a disc may stop on the chord all the same, and whoever wants it can have it despite findings.
    """
    drive = disc.movement.drive
    torque = disc.torque
    if drive is None or drive.torque_limit_nmm is None or torque is None:
        return []
    limit_nmm = drive.torque_limit_nmm
    tracks = tuple(sorted({int(disc.track_index[pluck]) + 1 for pluck in torque.peak_plucks}))
    grain_nmm, unsure_nmm = _load_unsure_nmm(disc, torque)
    condition = Condition(
        code=Code.DRIVE_OVERLOADED,
        says=(
            f"At {torque.peak_at_s:.3f} s the teeth of {len(torque.peak_plucks)} plucks load the disc with "
            f"{torque.peak_nmm:.3f} N mm; the drive carries {limit_nmm:.3f} N mm"
        ),
        so="the disc may slow down or stop",
        measured=torque.peak_nmm,
        limit=limit_nmm,
        unit="N mm",
        margin=limit_nmm - torque.peak_nmm + grain_nmm,
        rests_on=(f"{_DRIVE}/torque_limit_nmm",),
        also_unsure=unsure_nmm,
        at=Place(tracks=tracks, projections=torque.peak_plucks, sounds_s=torque.peak_at_s),
        remedy="Leave a note of this chord out, spread the chord, or arrange with load_limit keep.",
    )
    return judged(condition, disc.movement)


def _load_unsure_nmm(disc: Disc, torque: TurnTorque) -> tuple[float, float]:
    """What rounding and reading back may add to the peak; and what its teeth's stated numbers may."""
    movement = disc.movement
    lifted = [int(disc.track_index[pluck]) + 1 for pluck in torque.peak_plucks]
    grain_nmm = unsure_nmm = 0.0
    for place, tooth in enumerate(movement.teeth):
        times = lifted.count(tooth.track)
        if not times or not tooth.usable or tooth.stiffness_n_per_mm is None or tooth.lift_mm is None:
            continue
        radius_mm = movement.tracks[tooth.track - 1].radius_mm
        stiffness_off = movement.plus_minus(f"/teeth/{place}/stiffness_n_per_mm")
        lift_off_mm = movement.plus_minus(f"/teeth/{place}/lift_mm")
        grain_nmm += times * (2 * GRAIN_MM * tooth.stiffness_n_per_mm * radius_mm + LOAD_GRAIN_NMM)
        unsure_nmm += times * radius_mm * (stiffness_off * tooth.lift_mm + lift_off_mm * tooth.stiffness_n_per_mm)
    return grain_nmm, unsure_nmm


def winding_lasts(disc: Disc) -> list[Finding]:
    """An error where a winding plays less than one turn of this disc, advice where it plays less than two.

    It ends with the barrel's turns, or where the torque at the disc falls below friction and the disc's heaviest
    chord. What is not stated (efficiency, friction, teeth) is left aside: the turns are then an upper bound, and
    too few even so.
    """
    wound, movement = _wound(disc), disc.movement
    if wound is None:
        return []
    drive, load = wound
    run = run_down(drive, load, movement.revolution_s)
    says = f"A full winding plays {_at_most(disc)}{run.turn_count:.2f} turns of this disc"
    if run.ended_by == "load":
        says += (
            f", as the spring brings {run.full_nmm:.1f} N mm to it when full, and friction and "
            f"its heaviest chord take {run.needed_nmm:.1f} N mm"
        )
    unsure_count = _winding_unsure(movement, drive, load, lambda each: each.turn_count)
    condition = Condition(
        code=Code.WINDING_TOO_SHORT,
        says=says,
        so="the disc stops before its tune is over",
        measured=run.turn_count,
        limit=LEAST_TURNS,
        unit="turns",
        margin=run.turn_count - LEAST_TURNS,
        rests_on=(),
        also_unsure=unsure_count,
        at=Place(),
        remedy=f"Thin out the heaviest chord, or give the movement a stronger spring or more turns. {_LET_DOWN}",
    )
    findings = judged(condition, movement)
    if findings or run.turn_count >= ADVISED_TURNS:
        return findings
    return [
        Finding(
            code=Code.WINDING_TOO_SHORT,
            level=Level.ADVICE,
            message=f"{says}: not enough for a turn that clears the star wheels and one that is heard."
            + told_worth(run.turn_count - ADVISED_TURNS, unsure_count, "turns", fails=True),
            measured=run.turn_count,
            limit=ADVISED_TURNS,
            unit="turns",
            at=Place(),
            remedy="Wind again between the clearing turn and the tune.",
        )
    ]


def tempo_holds(disc: Disc) -> list[Finding]:
    """A warning where the disc slows more in one turn of a winding than is just heard.

    Judged within one turn, in which the tune is heard, and in the last whole one, in which the loss is greatest. Over
    a whole winding nearly every spring loses more, and nobody compares the first turn with the last; the
    report tells it. 2.5 % is for one note moved among equal ones (Friberg and Sundberg 1995); for whole sequences
    Drake and Botte (1993) found 1.5 to 3 %. So slow a drift is heard less, not more.
    """
    wound = _wound(disc)
    if wound is None:
        return []
    drive, load = wound
    run = run_down(drive, load, disc.movement.revolution_s)
    slows_percent = _PERCENT * run.last_turn_slows_ratio
    if slows_percent <= MOST_SLOWING_PERCENT or not run.turn_count:
        return []
    unsure_percent = _PERCENT * _winding_unsure(disc.movement, drive, load, lambda run: run.last_turn_slows_ratio)
    steady = steady_turns(drive, load, MOST_SLOWING_PERCENT / _PERCENT)
    return [
        Finding(
            code=Code.TEMPO_SAGS,
            level=Level.WARNING,
            message=(
                f"In the last turn of a winding the disc slows by {'at least ' * bool(_at_most(disc))}"
                f"{slows_percent:.2f} %; {MOST_SLOWING_PERCENT:g} % is just heard."
                + told_worth(MOST_SLOWING_PERCENT - slows_percent, unsure_percent, "%", fails=True)
            ),
            measured=slows_percent,
            limit=MOST_SLOWING_PERCENT,
            unit="%",
            at=Place(),
            remedy=(
                f"Wind again after {steady} {'turn' if steady == 1 else 'turns'}, which slow by less, "
                "or use less of the spring (usable_turns)."
                if steady
                else f"Use a spring wound further from its free shape, or a train with more turns. {_LET_DOWN}"
            ),
        )
    ]


def train_gives_the_turn(disc: Disc) -> list[Finding]:
    """A warning where air brake and train give another turn than the one stated.

    The disc itself is right, since its notes lie at angles; the tune plays faster or slower. Within what the numbers
    are stated to be off by, and TURN_AGREES_PERCENT for their rounding, they agree.
    """
    movement = disc.movement
    winding = movement.drive.winding if movement.drive is not None else None
    braked_s = None if winding is None else braked_revolution_s(winding)
    if winding is None or braked_s is None:
        return []
    share = movement.plus_minus(f"{_WINDING}/brake_turns_per_s") / (winding.brake_turns_per_s or math.inf)
    share += _stages_share(movement, winding.disc_to_brake, f"{_WINDING}/disc_to_brake")
    within_s = movement.plus_minus("/revolution_s") + braked_s * share
    within_s += movement.revolution_s * TURN_AGREES_PERCENT / _PERCENT
    if abs(braked_s - movement.revolution_s) <= within_s:
        return []
    return [
        Finding(
            code=Code.TURN_DIFFERS,
            level=Level.WARNING,
            message=(
                f"The air brake's {winding.brake_turns_per_s:.4g} turns a second through a train of "
                f"{gear_ratio(winding.disc_to_brake):.6g} turn the disc in {braked_s:.6g} s; {movement.id} states "
                f"{movement.revolution_s:.3f} s, and {within_s:.3f} s may lie between them."
            ),
            measured=braked_s,
            limit=movement.revolution_s,
            unit="s",
            at=Place(),
            remedy="Measure the turn, and correct revolution_s, brake_turns_per_s or disc_to_brake.",
        )
    ]


def _wound(disc: Disc) -> tuple[WoundDrive, DiscLoad] | None:
    """The winding in numbers and what the disc asks of it, nothing where its teeth are not stated; None for none."""
    drive = disc.movement.drive
    if drive is None or drive.winding is None:
        return None
    torque = disc.torque
    load = DiscLoad(
        peak_nmm=0.0 if torque is None else torque.peak_nmm, mean_nmm=0.0 if torque is None else torque.mean_nmm
    )
    return wound_drive_of(drive.winding), load


def _at_most(disc: Disc) -> str:
    winding = disc.movement.drive.winding if disc.movement.drive is not None else None
    known = winding is not None and winding.efficiency is not None and winding.friction_nmm is not None
    return "" if known and disc.torque is not None else "at most "


def _winding_unsure(
    movement: Movement, drive: WoundDrive, load: DiscLoad, told: Callable[[WindingRun], float]
) -> float:
    """By how much the winding's numbers may shift what a run tells: each made worse by its worth, then summed."""
    winding = movement.drive.winding if movement.drive is not None else None
    if winding is None:
        return 0.0
    spring = winding.spring
    stages_share = _stages_share(movement, winding.barrel_to_disc, f"{_WINDING}/barrel_to_disc")
    shrunk = {
        "rate_nmm_per_rad": _rate_share(movement, winding),
        "wound_count": movement.plus_minus(f"{_SPRING}/wound_turns") / spring.wound_turns,
        "usable_count": movement.plus_minus(f"{_SPRING}/usable_turns") / spring.usable_turns,
        "train_ratio": stages_share,
        "efficiency_factor": movement.plus_minus(f"{_WINDING}/efficiency") / drive.efficiency_factor,
    }
    # Shrunk by division: a number that may be off by all of itself must not become none at all.
    worse = [replace(drive, **{name: getattr(drive, name) / (1 + share)}) for name, share in shrunk.items() if share]
    worse.append(replace(drive, friction_nmm=drive.friction_nmm + movement.plus_minus(f"{_WINDING}/friction_nmm")))
    as_stated = told(run_down(drive, load, movement.revolution_s))
    return math.fsum(abs(told(run_down(each, load, movement.revolution_s)) - as_stated) for each in worse)


def _rate_share(movement: Movement, winding: Winding) -> float:
    """By what share E·b·h³/L may be off, to first order."""
    spring = winding.spring
    return (
        movement.plus_minus(f"{_SPRING}/elastic_modulus_n_per_mm2") / spring.elastic_modulus_n_per_mm2
        + movement.plus_minus(f"{_SPRING}/width_mm") / spring.width_mm
        + 3 * movement.plus_minus(f"{_SPRING}/thickness_mm") / spring.thickness_mm
        + movement.plus_minus(f"{_SPRING}/length_mm") / spring.length_mm
    )


def _stages_share(movement: Movement, stages: tuple[float, ...], pointer: str) -> float:
    return sum(movement.plus_minus(f"{pointer}/{place}") / ratio for place, ratio in enumerate(stages))
