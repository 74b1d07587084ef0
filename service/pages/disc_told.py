"""What the page of a disc says in words: the verdict, the facts, what was lost and why, the files, the cautions."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from layout.file_names import HEARING_FILES, files_for
from service.pages.disc_shown import Record, ShownDisc
from service.pages.texts import text_of

LEVELS = ("error", "warning", "advice")
VOICES = ("highest", "inner", "lowest", "melody")
CAUTIONS = {
    "laser": ("laser", "fume", "zinc", "edges", "spring", "who"),
    "punch-press": ("press", "eyes", "edges", "spring", "who"),
}


@dataclass(frozen=True, slots=True, kw_only=True)
class VoiceTold:
    """A row of what was lost: the voice, counts, the share of its worth that is kept, the reasons in words."""

    name: str
    note_count: int
    kept_count: int
    kept_share: str
    moved: str
    reasons: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class FileTold:
    """A file: its name, where it is had (None where it is kept back), what it is and who wants it."""

    name: str
    address: str | None
    what: str
    who: str


@dataclass(frozen=True, slots=True, kw_only=True)
class FindingTold:
    """A finding of the list: its place in layout.json, what it says, and whether it has a place on the disc."""

    place: int
    level: str
    message: str
    remedy: str
    has_place: bool


def verdict_of(shown: ShownDisc) -> str:
    """Good to cut or not, in a sentence."""
    findings = shown.layout["findings"]
    counts = {level: sum(finding["level"] == level for finding in findings) for level in LEVELS}
    if not shown.layout["good_to_cut"]:
        return counted("disc.verdict_bad", counts["error"])
    others = counts["warning"] + counts["advice"]
    return counted("disc.verdict_looked_at", others) if others else text_of("disc.verdict_good")


def facts_of(shown: ShownDisc) -> tuple[tuple[str, str], ...]:
    """The facts beside the drawing: each a name and a value."""
    layout, report, movement = shown.layout, shown.report, shown.movement
    blank = movement.disc
    total = report["total"]
    used = len({projection["track"] for projection in layout["projections"]})
    worth = "disc.fact_worth_proved" if report["worth"]["proved"] else "disc.fact_worth_open"
    facts = {
        "movement": f"{movement.title} ({movement.id})",
        "cutter": f"{shown.cutter.title} ({shown.cutter.id})",
        "disc": text_of("disc.fact_disc_value", **layout["disc"]),
        "blank": text_of(
            "disc.fact_blank_value",
            diameter=f"{blank.outer_diameter_mm:g}",
            thickness=f"{blank.thickness_mm:g}",
            material=blank.material,
        ),
        "turn": text_of("disc.fact_turn_value", way=text_of(f"disc.{movement.turns}"), s=f"{movement.revolution_s:g}"),
        "projections": text_of("disc.fact_projections_value", count=report["projection_count"], tracks=used),
        "notes": text_of("disc.fact_notes_value", kept=total["kept_count"], asked=total["note_count"]),
        "worth": text_of(worth, share=_percent(total["kept_share"])),
        "pitch": text_of("disc.fact_pitch_value", semitones=signed(layout["transposed_semitones"])),
        "speed": text_of("disc.fact_speed_value", factor=f"{layout['speed_factor']:.4g}"),
        "fingerprint": layout["fingerprint"],
    }
    if layout["disc"]["of"] == 1:
        del facts["disc"]
    return tuple((text_of(f"disc.fact_{name}"), value) for name, value in facts.items())


def lost_of(report: Record) -> tuple[VoiceTold, ...]:
    """What became of each voice's notes; the last row is of all."""
    voices = [name for name in VOICES if report[name] is not None and report[name]["note_count"]]
    return tuple(_voice(name, report[name]) for name in (*voices, "total"))


def not_asked_of(report: Record) -> tuple[str, ...]:
    """The notes that were not asked for, counted by reason in words."""
    return _reasons(report["not_asked"])


def files_of(shown: ShownDisc) -> tuple[FileTold, ...]:
    """Every file of the disc in the order of their use; those kept back without an address."""
    return tuple(
        FileTold(
            name=name,
            address=shown.files.get(name),
            what=text_of(f"disc.file_{_key(name)}"),
            who=text_of(f"disc.file_{_key(name)}_who"),
        )
        for name in (*files_for(shown.cutter), *HEARING_FILES)
        if name in shown.files or name in shown.kept_back
    )


def findings_of(layout: Record) -> tuple[tuple[str, tuple[FindingTold, ...]], ...]:
    """The findings by level, the gravest first; levels without one are left out."""
    told = [
        FindingTold(
            place=place,
            level=finding["level"],
            message=finding["message"],
            remedy=finding["remedy"],
            has_place=bool(finding["at"]),
        )
        for place, finding in enumerate(layout["findings"])
    ]
    by_level = ((level, tuple(one for one in told if one.level == level)) for level in LEVELS)
    return tuple((counted(f"disc.level_{level}", len(some)), some) for level, some in by_level if some)


def cautions_of(shown: ShownDisc) -> tuple[tuple[str, str], ...]:
    """The cautions for the disc's cutter: each a name and what to do."""
    return cautions_for(shown.cutter.kind)


def cautions_for(cutter_kind: str) -> tuple[tuple[str, str], ...]:
    """The cautions where such a cutter cuts: each a name and what to do."""
    names = CAUTIONS[cutter_kind]
    return tuple((text_of(f"disc.caution_{name}"), text_of(f"disc.caution_{name}_do")) for name in names)


def counted(key: str, count: int) -> str:
    """A text that counts, in its form for one where there is one."""
    return text_of(f"{key}_one" if count == 1 else key, count=count)


def signed(semitones: int) -> str:
    """A transposition with its sign, the minus as it is printed; nought without one."""
    return f"{semitones:+d}".replace("-", "\N{MINUS SIGN}").replace("+0", "0")


def _voice(name: str, tally: Mapping[str, Any]) -> VoiceTold:
    moved = []
    if tally["octave_count"]:
        moved.append(counted("disc.moved_octave", tally["octave_count"]))
    if tally["nudged_count"]:
        nudged = {"count": tally["nudged_count"], "most": f"{tally['largest_nudge_ms']:.1f}"}
        moved.append(text_of("disc.moved_nudge_one" if tally["nudged_count"] == 1 else "disc.moved_nudge", **nudged))
    return VoiceTold(
        name=text_of(f"disc.voice_{name}"),
        note_count=tally["note_count"],
        kept_count=tally["kept_count"],
        kept_share=_percent(tally["kept_share"]),
        moved="; ".join(moved),
        reasons=_reasons(tally["left_out"]),
    )


def _reasons(counts: Mapping[str, int]) -> tuple[str, ...]:
    return tuple(
        text_of("disc.because", count=count, reason=text_of(f"script.disc.reason_{_key(reason)}"))
        for reason, count in sorted(counts.items(), key=lambda item: -item[1])
    )


def _percent(share: float | None) -> str:
    return "–" if share is None else f"{100 * share:.1f} %"


def _key(name: str) -> str:
    return name.replace("-", "_").replace(".", "_")
