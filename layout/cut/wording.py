"""What the drawings say: the lines at the head of the file, and the lettering on the disc."""

import math
from dataclasses import dataclass

from layout.documents.cutter import Cutter
from layout.mechanics.bending import over_bend_rad
from layout.mechanics.plain_letters import is_mostly_lost, plain_ascii
from layout.place.disc import Disc
from layout.version import ENGINE_VERSION

NOT_GOOD = "NOT GOOD TO CUT"
RECORD = "RECORD - NOT FOR CUTTING"
# Characters of a title on the disc: a longer one is hard to read at a glance; what does not fit is tried shorter.
MOST_LETTERS = (32, 24, 16)
# The labels from the top line to the lowest.
_AS_READ = ("title", "part", "movement", "side", "burr", "kerf", "order", "fingerprint")
# What each is called in words for a person.
_NAMES = {"part": "disc of the set", "burr": "burr side", "kerf": "kerf that is compensated", "order": "order number"}
MOST_COMMENT = 250  # characters; DXF reference: strings of releases before 2000 end at 255 bytes


@dataclass(frozen=True, slots=True, kw_only=True)
class Words:
    """What one drawing must say.

    Attributes:
        title: The tune's title.
        fingerprint: Of all inputs; "" for none, which is neither lettered nor told at the head.
        not_good: The reason for which a faulty disc is cut, if it is.
        is_record: Whether it is the record, which is never cut.
        part: Which disc of a set it is, such as "disc 2 of 3"; "" for one alone.
        order_number: The shop's; None for none.
        held_slug_count: How many slugs of holes and slots hang on bridges.
    """

    title: str
    fingerprint: str
    not_good: str | None
    is_record: bool
    part: str = ""
    order_number: str | None = None
    held_slug_count: int = 0


@dataclass(frozen=True, slots=True, kw_only=True)
class Inscription:
    """One line to engrave.

    Attributes:
        forms: What it says, in printable ASCII; the fullest form first, then ever shorter ones.
        row: Where it stands among the others, read from the top.
        name: What it is, for a person.
        is_warning: Whether it may even stand among openings, rather than be missing.
    """

    forms: tuple[str, ...]
    row: int
    name: str
    is_warning: bool = False


def head_lines(disc: Disc, words: Words) -> tuple[str, ...]:
    """Comments for the file's head: the warnings first, every line in plain ASCII.

    A title that is mostly lost in ASCII is kept as it is: the writer spells its characters out.
    """
    movement, cutter = disc.movement, disc.cutter
    lines = [
        *([RECORD] if words.is_record else []),
        *([] if words.not_good is None else [f"{NOT_GOOD}: {words.not_good}"]),
        f"discwright {ENGINE_VERSION}",
        f"title: {words.title}",
        *([words.part] if words.part else []),
        *([] if words.order_number is None else [f"order: {words.order_number}"]),
        f"movement: {movement.id} revision {movement.revision}",
        f"blank: {movement.disc.material}, {movement.disc.thickness_mm:g} mm thick",
        f"cutter: {cutter.id}",
        *([f"fingerprint: {words.fingerprint}"] if words.fingerprint else []),
        f"drawn from the {_side(cutter)}; origin at the disc centre; millimetres",
        *_how_it_is_drawn(disc),
        *_how_slugs_are_held(cutter, words.held_slug_count),
        "index mark: at disc angle 0; its barb points the way the disc turns",
    ]
    kept = f"title: {words.title}" if is_mostly_lost(words.title) else None
    return tuple((line if line == kept else plain_ascii(line))[:MOST_COMMENT] for line in lines)


def inscriptions(disc: Disc, words: Words) -> tuple[Inscription, ...]:
    """The lines to engrave, the ones that must stay longest first; only the warnings where the cutter has no labels.

    Warnings, side, a kerf that is compensated, disc of a set, movement, order, burr; fingerprint and title come
    last. A title that is mostly lost in ASCII is left out; so is one of blanks.
    """
    warnings = (RECORD,) * words.is_record + (NOT_GOOD,) * (words.not_good is not None)
    lines = [
        Inscription(forms=(text,), row=row, name=f"warning {text}", is_warning=True)
        for row, text in enumerate(warnings)
    ]
    if disc.cutter.labels:
        lines += _labels(disc, words, below=len(warnings))
    return tuple(lines)


def _labels(disc: Disc, words: Words, *, below: int) -> list[Inscription]:
    """The lines under so many warnings: their forms in the order of their worth, their rows as they are read."""
    movement, title = disc.movement, plain_ascii(words.title)
    named = _shortened(plain_ascii(f"{movement.id} rev {movement.revision}"), MOST_LETTERS[0])
    forms = {
        "side": (_side(disc.cutter).upper(),),
        "kerf": (f"KERF COMPENSATED {disc.cutter.kerf_mm:g}",) if disc.cutter.kerf_compensated else (),
        "part": (words.part.upper(),) if words.part else (),
        "movement": (named,),
        # Never shortened: part of a number is another number.
        "order": () if words.order_number is None else (f"ORDER {words.order_number}", words.order_number),
        "burr": () if disc.cutter.burr_side is None else (f"BURR ON {_plainly(disc.cutter.burr_side).upper()}",),
        "fingerprint": (words.fingerprint,) if words.fingerprint else (),
        "title": tuple(dict.fromkeys(_shortened(title, most) for most in MOST_LETTERS))
        if title and not is_mostly_lost(words.title)
        else (),
    }
    read = [name for name in _AS_READ if forms[name]]
    return [
        Inscription(forms=says, row=below + read.index(name), name=_NAMES.get(name, name))
        for name, says in forms.items()
        if says
    ]


def _shortened(text: str, most: int) -> str:
    return text if len(text) <= most else text[: most - 3].rstrip() + "..."


def _side(cutter: Cutter) -> str:
    return _plainly(cutter.drawn_from)


def _plainly(side: str) -> str:
    return side.replace("-", " ")


def _how_slugs_are_held(cutter: Cutter, count: int) -> list[str]:
    if cutter.bridges is None or cutter.bridges.slugs is None or not count:
        return []
    slugs = cutter.bridges.slugs
    bridges = f"{'one bridge' if slugs.count == 1 else f'{slugs.count} bridges'} of {slugs.width_mm:g} mm"
    held = "1 is" if count == 1 else f"{count} are"
    return [f"slugs: {held} held, each by {bridges}; break them out by hand"]


def _how_it_is_drawn(disc: Disc) -> list[str]:
    cutter = disc.cutter
    lines = ["outlines are finished edges; kerf is not added"]
    if cutter.kerf_compensated:
        lines = [f"outlines are the beam's path, compensated for a kerf of {cutter.kerf_mm:g} mm already; add none"]
    if cutter.fold is not None and cutter.fold.slit == "centre-line" and disc.pattern.making == "fold":
        lines.append(f"open slits are cut along their middle, one kerf of {cutter.kerf_mm:g} mm wide")
    if cutter.fold is not None and cutter.fold.springback is not None and disc.pattern.making == "fold":
        bent_deg = math.degrees(over_bend_rad(math.radians(cutter.fold.springback.opens_deg)))
        lines.append(
            f"folds: to the star side, to stand at 90 degrees; bend to {bent_deg:.4g} degrees, for they open again"
        )
    if cutter.burr_side is not None:
        lines.append(f"burr: on the {_plainly(cutter.burr_side)}")
    if cutter.kind == "punch-press":
        tool = f"tool {disc.pattern.tool}" if disc.pattern.tool else "this press has no tool that fits"
        lines.append(f"hits: one point for each projection, where the tool strikes; {tool}")
    return lines
