"""What a proof says to a customer: what the disc plays and loses, and what was found, in words that need no trade."""

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any

from layout.check.finding import Code
from service.pages.disc_data import disc_data
from service.pages.disc_shown import Record, ShownDisc
from service.pages.disc_told import LEVELS, VOICES, counted
from service.pages.texts import text_of

# What a finding is about, for somebody who neither cuts nor sets a movement.
KINDS: Mapping[str, frozenset[Code]] = {
    "nothing": frozenset({Code.NOTHING_TO_PLAY}),
    "too_long": frozenset({Code.MUSIC_TOO_LONG, Code.PLUCK_OUTSIDE_MUSIC}),
    "metal": frozenset(
        {
            *(Code.WEB_TOO_THIN, Code.WEB_TO_RIM, Code.WEB_TO_CENTRE_HOLE, Code.WEB_TO_FEATURE, Code.IN_KEEP_OUT),
            *(Code.TRACK_OFF_DISC, Code.LINE_CUT_THROUGH, Code.RING_CUT_THROUGH),
        }
    ),
    "repeats": frozenset({Code.REPEAT_TOO_SOON, Code.DAMPER_NOT_RECOVERED}),
    "rest": frozenset({Code.REST_NOT_CLEAR, Code.START_TOO_SHORT}),
    "movement": frozenset(
        {
            *(Code.STAR_HITS_DISC, Code.STAR_NOT_REACHED, Code.STEP_TOO_SHORT, Code.STEP_TOO_LONG, Code.TIP_IN_BEND),
            *(Code.DEPTH_AT_ROOT, Code.TOOTH_LEFT_HANGING, Code.NEIGHBOUR_FOULED, Code.OWN_STAR_MISSED),
        }
    ),
    "making": frozenset(
        {
            *(Code.CANNOT_FORM, Code.NO_TOOL, Code.SLIT_TOO_NARROW, Code.HOLE_TOO_SMALL, Code.SMALL_FOR_SHEET),
            *(Code.BEND_TOO_TIGHT, Code.FOLDS_ALONG_ROLLING, Code.KERF_CLOSES, Code.LEAD_HAS_NO_ROOM),
            *(Code.BRIDGE_HAS_NO_ROOM, Code.BRIDGE_ON_FIT, Code.HIT_OVER_OPENING, Code.FOOT_ON_FORMED),
            Code.PRESS_TOO_WEAK,
        }
    ),
    "unsure": frozenset({Code.MARGIN_UNSURE}),
    "label": frozenset({Code.LABEL_HIDDEN, Code.LABEL_MISSING}),
    "timing": frozenset({Code.TIMING_TOO_COARSE}),
    "drive": frozenset({Code.DRIVE_OVERLOADED, Code.WINDING_TOO_SHORT}),
    "tempo": frozenset({Code.TURN_DIFFERS, Code.TEMPO_SAGS}),
}
NOT_TOLD = frozenset({"ruled-out"})  # which notes the shop took out by hand is the shop's; how many is in the report
PLACES_SHOWN = 24  # findings of one kind that a customer is led to one by one: enough to see what is meant
OF_A_NOTE = ("onset_s", "pitch", "voice")


@dataclass(frozen=True, slots=True, kw_only=True)
class FoundTold:
    """What was found of one kind.

    Attributes:
        words: What it is.
        places: In the list of findings, those that are shown on the disc: PLACES_SHOWN at most.
        more: How many more have a place on the disc.
    """

    words: str
    places: tuple[int, ...]
    more: int


@dataclass(frozen=True, slots=True, kw_only=True)
class FoundOfLevel:
    """What was found of one level, the heading that says how much it matters before it."""

    level: str
    heading: str
    found: tuple[FoundTold, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class PlayedTold:
    """What a disc plays of its tune.

    Attributes:
        kept: How many of the notes it plays.
        left_out: How many it does not play, and why, each reason a line; () where it plays all.
        voices: How much of each voice it plays; () where it plays all.
        otherwise: In what it sounds otherwise than written: moved, faster, nudged; () where in nothing.
        not_asked: How many notes of the file the disc was not asked to play, and why; () where none.
    """

    kept: str
    left_out: tuple[str, ...]
    voices: tuple[str, ...]
    otherwise: tuple[str, ...]
    not_asked: tuple[str, ...]


def customer_data(shown: ShownDisc) -> dict[str, Any]:
    """What the scripts of a proof know: as much as its picture, sound and report tell, and nothing of the shop's own.

    Left out are fingerprints, weights, the tuning of single teeth, where settings are changed, and which notes the
    shop took out by hand.

    Args:
        shown: The disc.
    """
    data = disc_data(replace(shown, rulings_at=None))
    layout = dict(data["layout"])
    for name in ("fingerprint", "worth", "good_to_cut"):
        del layout[name]
    layout["notes"] = [{name: note[name] for name in OF_A_NOTE if name in note} for note in layout["notes"]]
    layout["left_out"] = [one for one in layout["left_out"] if one["reason"] not in NOT_TOLD]
    layout["findings"] = [{"level": one["level"], "at": one["at"]} for one in layout["findings"]]
    tracks = [
        {**track, "teeth": [{"tooth": tooth["tooth"], "cents": 0, "damped": True} for tooth in track["teeth"]]}
        for track in data["movement"]["tracks"]
    ]
    return {**data, "movement": {**data["movement"], "tracks": tracks}, "layout": layout}


def played_of(report: Record) -> PlayedTold:
    """What a disc plays of its tune, by its report."""
    total = report["total"]
    voices = [name for name in VOICES if report[name] is not None and report[name]["note_count"]]
    left_out = total["left_out"]
    return PlayedTold(
        kept=text_of(
            "proof.kept" if left_out else "proof.kept_all", kept=total["kept_count"], asked=total["note_count"]
        ),
        left_out=_reasons(left_out),
        voices=tuple(
            text_of(
                "proof.voice",
                voice=text_of(f"disc.voice_{name}"),
                kept=report[name]["kept_count"],
                asked=report[name]["note_count"],
            )
            for name in voices
        )
        if left_out
        else (),
        otherwise=tuple(_otherwise(report)),
        not_asked=_reasons(report["not_asked"]),
    )


def found_of(layout: Record) -> tuple[FoundOfLevel, ...]:
    """What was found, the gravest first; levels and kinds of which there is nothing are left out."""
    told = []
    for level in LEVELS:
        by_kind: dict[str, list[int]] = {}
        for place, finding in enumerate(layout["findings"]):
            if finding["level"] == level:
                places = by_kind.setdefault(kind_of(finding["code"]), [])
                places.extend([place] if finding["at"] else [])
        found = tuple(
            FoundTold(
                words=text_of(f"proof.found_{kind}"),
                places=tuple(places[:PLACES_SHOWN]),
                more=len(places[PLACES_SHOWN:]),
            )
            for kind, places in by_kind.items()
        )
        if found:
            told.append(FoundOfLevel(level=level, heading=text_of(f"proof.level_{level}"), found=found))
    return tuple(told)


def kind_of(code: str) -> str:
    """What a finding is about; "other" for what no disc of an order is found to be."""
    return next((kind for kind, codes in KINDS.items() if code in codes), "other")


def _otherwise(report: Record) -> list[str]:
    total, semitones = report["total"], report["transposed_semitones"]
    told = []
    if semitones:
        key = "proof.moved_up" if semitones > 0 else "proof.moved_down"
        told.append(counted(key, abs(semitones)))
    if report["speed_factor"] != 1:
        told.append(text_of("proof.speed", percent=f"{100 * report['speed_factor']:.4g}"))
    if total["octave_count"]:
        told.append(counted("proof.octaves", total["octave_count"]))
    if total["nudged_count"]:
        most_ms = f"{total['largest_nudge_ms']:.0f}"
        one = total["nudged_count"] == 1
        told.append(text_of("proof.nudged_one" if one else "proof.nudged", count=total["nudged_count"], most=most_ms))
    return told


def _reasons(counts: Mapping[str, int]) -> tuple[str, ...]:
    return tuple(
        counted(f"proof.lost_{reason.replace('-', '_')}", count)
        for reason, count in sorted(counts.items(), key=lambda item: -item[1])
    )
