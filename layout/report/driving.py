"""What drives the disc, told from the disc alone: start, torque over the turn, winding, and what is not stated."""

from layout.documents.movement import Movement
from layout.documents.pitch import key_of, pitch_of
from layout.mechanics.starting import starting_of
from layout.mechanics.winding import DiscLoad, braked_revolution_s, run_down, wound_drive_of
from layout.place.disc import Disc
from layout.report.report import Driving, Loaded


def driving_of(disc: Disc) -> Driving:
    """What the movement's drive makes of this disc; a movement that states no drive has only names to tell.

    Args:
        disc: The disc; without projections it has no torque, and is wound as one that asks for none.
    """
    movement = disc.movement
    torque = disc.torque
    winding = movement.drive.winding if movement.drive is not None else None
    load = DiscLoad(
        peak_nmm=0.0 if torque is None else torque.peak_nmm, mean_nmm=0.0 if torque is None else torque.mean_nmm
    )
    pitches = {tooth.track: pitch_of(key_of(tooth.pitch)) for tooth in movement.teeth}
    return Driving(
        starting=starting_of(movement, movement.revolution_s),
        starting_fastest=starting_of(movement, movement.fastest_revolution_s),
        torque=torque if disc.projection_count else None,
        peak_chord=tuple(
            Loaded(track=track, pitch=pitches[track])
            for pluck in (() if torque is None else torque.peak_plucks)
            for track in [int(disc.track_index[pluck]) + 1]
        ),
        winding=None if winding is None else run_down(wound_drive_of(winding), load, movement.revolution_s),
        upper_bound=winding is not None
        and (winding.efficiency is None or winding.friction_nmm is None or torque is None),
        braked_revolution_s=None if winding is None else braked_revolution_s(winding),
        clearing_count=len(disc.used_tracks),
        not_stated=_not_stated(movement),
    )


def _not_stated(movement: Movement) -> tuple[str, ...]:
    """The fields left out that a figure here would need, as they are named in the document; of a part left out, it."""
    teeth = [tooth for tooth in movement.teeth if tooth.usable]
    missing = [
        f"teeth.{name}"
        for name in ("stiffness_n_per_mm", "lift_mm")
        if any(getattr(tooth, name) is None for tooth in teeth)
    ]
    drive = movement.drive
    if drive is None:
        return ("drive", *missing)
    names = ("torque_limit_nmm", "surplus_torque_nmm", "disc_inertia_kg_m2", "train", "winding")
    found = [f"drive.{name}" for name in names if getattr(drive, name) in (None, ())]
    if drive.winding is not None:
        of_winding = ("efficiency", "friction_nmm", "disc_to_brake", "brake_turns_per_s")
        found += [f"drive.winding.{name}" for name in of_winding if getattr(drive.winding, name) in (None, ())]
    return (*found, *missing)
