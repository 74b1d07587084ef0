"""`discwright run`: every tune of a folder becomes discs, with what is done already left as it is."""

import argparse
import json
import os
import signal
import sys
import time
from collections import Counter
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from layout.documents import Cutter, Movement, Settings
from layout.errors import LayoutError
from layout.file_names import CUTTING_FILES, files_for
from service.commands.arguments import OneLineParser, Tools, add_json, folder
from service.commands.disc_folders import disc_folders, earlier_folders
from service.commands.errors import ERROR_STANDS, GOOD, CommandError
from service.commands.files_in import read_file, read_named_cutter, read_named_movement, read_named_settings
from service.commands.files_out import write_folders
from service.commands.output import say, say_json
from service.commands.progress import Progress
from service.wording import shortened

ABOUT = (
    "Make the files of discs from every MIDI file of a folder, for one movement or several. Each pair of a tune and "
    "a movement gets a folder of its own. What an earlier run with the same inputs has finished is left as it is, so "
    "a run that was broken off goes on where it was. A tune that cannot be used is named, and the others go on; "
    "cutting files that stood in its place are removed. Ends with 0 where every disc is good to cut, with 3 where one "
    "is not or a tune cannot be used."
)
EXAMPLE = """example:
  discwright run dances --movement fernhollow-31 --movement tarnlight-17 --out discs
      writes discs/polka/fernhollow-31/disc.dxf and so on, and a list of all as discs/run.json"""
SUFFIXES = (".mid", ".midi")
LIST = "run.json"
FINISHED, GOOD_TO_CUT, NOT_GOOD, REFUSED = "done before", "good to cut", "not good to cut", "refused"


@dataclass(frozen=True, slots=True, kw_only=True)
class _Pair:
    """A tune for a movement, and the folder its files go to."""

    tune: Path
    movement: Movement
    out: Path


@dataclass(frozen=True, slots=True, kw_only=True)
class _Outcome:
    """What became of a pair."""

    pair: _Pair
    what: str
    good_to_cut: bool
    reason: str | None = None


def add_arguments(parser: OneLineParser) -> None:
    """Add the arguments of this subcommand."""
    parser.add_argument("folder", type=folder, metavar="FOLDER", help="the folder with the tunes; its own folders too")
    parser.add_argument(
        "--movement",
        required=True,
        action="append",
        metavar="ID_OR_FILE",
        help="a movement the discs are for, by id or as a document; may be given several times",
    )
    parser.add_argument("--cutter", metavar="ID_OR_FILE", help="the machine that cuts them; by default fibre-laser")
    parser.add_argument("--settings", type=Path, metavar="FILE", help="a settings document (JSON) for all")
    parser.add_argument("--out", type=folder, required=True, metavar="DIR", help="the folder for the files")
    add_json(parser)


def run(asked: argparse.Namespace, tools: Tools) -> int:
    """Make the files; gives the exit code.

    Raises:
        CommandError: The folder, a document or --out cannot be used.
        LayoutError: A document is not valid.
    """
    movements = [read_named_movement(named, tools.limits) for named in asked.movement]
    maker = _Maker(
        tools=tools,
        cutter=read_named_cutter(asked.cutter, tools.limits),
        settings=read_named_settings(asked.settings, tools.limits),
    )
    pairs = _pairs(asked.folder, movements, asked.out)
    outcomes = _made(maker, pairs)
    told = _told(outcomes, asked.out)
    _write_list(asked.out, told)
    if asked.json:
        say_json(told)
    else:
        say(_lines(outcomes, asked.out))
    return GOOD if all(outcome.good_to_cut for outcome in outcomes) else ERROR_STANDS


def _made(maker: "_Maker", pairs: list[_Pair]) -> list[_Outcome]:
    progress = Progress(len(pairs), sys.stderr)
    outcomes: list[_Outcome] = []
    try:
        for pair in pairs:
            outcomes.append(maker.make(pair))
            progress.tell(is_work=outcomes[-1].what != FINISHED)
    except KeyboardInterrupt:
        progress.end()
        sys.stderr.write(f"stopped after {len(outcomes)} of {len(pairs)}; the same command goes on from there\n")
        raise
    progress.end()
    return outcomes


@dataclass(frozen=True, slots=True, kw_only=True)
class _Maker:
    """Makes the files of one pair after the other."""

    tools: Tools
    cutter: Cutter
    settings: Settings

    def make(self, pair: _Pair) -> _Outcome:
        limits = self.tools.limits
        try:
            tune = read_file(pair.tune, what="the tune", most_bytes=limits.upload_bytes)
            before = self._finished(pair, tune)
            if before is not None:
                return _Outcome(pair=pair, what=FINISHED, good_to_cut=before)
            discs = self.tools.planner.lay_out_discs(tune, pair.movement, self.cutter, self.settings, time.monotonic)
        except (LayoutError, CommandError) as refusal:
            reason = shortened(str(refusal), limits.shown_characters)
            self._write(pair, [])
            return _Outcome(pair=pair, what=REFUSED, good_to_cut=False, reason=reason)
        files = [self.tools.planner.files_of(disc) for disc in discs]
        self._write(pair, files)
        is_good = all(disc.good_to_cut for disc in discs)
        return _Outcome(pair=pair, what=GOOD_TO_CUT if is_good else NOT_GOOD, good_to_cut=is_good)

    def _write(self, pair: _Pair, files: list[dict[str, bytes]]) -> None:
        """Write the files of each disc; none: remove the cutting files of an earlier tune of the same name."""
        count = self.settings.discs
        folders: dict[Path, dict[str, bytes]] = {where: {} for where in earlier_folders(pair.out, count)}
        for number, where in enumerate(disc_folders(pair.out, count)):
            folders[where] = files[number] if files else {}
        with _until_written():
            write_folders(folders, cutting=CUTTING_FILES)

    def _finished(self, pair: _Pair, tune: bytes) -> bool | None:
        """Whether an earlier run's discs are good to cut; None where they are not those of these inputs, or not all."""
        good = []
        documents = (pair.movement, self.cutter, self.settings)
        for number, where in enumerate(disc_folders(pair.out, self.settings.discs), start=1):
            wanted = self.tools.planner.fingerprint_of(tune, *documents, number)
            is_good = self._kept_in(where, wanted)
            if is_good is None:
                return None
            good.append(is_good)
        return all(good)

    def _kept_in(self, where: Path, fingerprint: str) -> bool | None:
        """Whether the disc in a folder is good to cut; None where it is another, or not whole."""
        try:
            layout = json.loads((where / "layout.json").read_bytes())
            making = json.loads((where / "making.json").read_bytes())  # written after the layout, before what is cut
            is_same = layout["fingerprint"] == making["fingerprint"] == fingerprint
            is_good = bool(layout["good_to_cut"])
        except (OSError, ValueError, KeyError, TypeError, RecursionError):
            return None
        names = [name for name in files_for(self.cutter) if is_good or name not in CUTTING_FILES]
        return is_good if is_same and all((where / name).is_file() for name in names) else None


@contextmanager
def _until_written() -> Iterator[None]:
    """Put off Ctrl-C until the files of a pair are all in their place."""
    told: list[int] = []
    usual = signal.signal(signal.SIGINT, lambda number, _frame: told.append(number))
    try:
        yield
    finally:
        signal.signal(signal.SIGINT, usual)
    if told:
        raise KeyboardInterrupt


def _write_list(out: Path, told: dict[str, Any]) -> None:
    """Write the list of all pairs, whole or not at all.

    Raises:
        CommandError: It cannot be written.
    """
    part = out / f".{LIST}.part"
    try:
        out.mkdir(parents=True, exist_ok=True)
        part.write_text(json.dumps(told, indent=2) + "\n", encoding="ascii")
        os.replace(part, out / LIST)
    except OSError as refusal:
        raise CommandError(f"cannot write to {str(out)!r}: {refusal.strerror or refusal}") from refusal


def _pairs(tunes_in: Path, movements: list[Movement], out: Path) -> list[_Pair]:
    if not tunes_in.is_dir():
        raise CommandError(f"{str(tunes_in)!r} is no folder; name the folder with the tunes")
    ids = [movement.id for movement in movements]
    if len(set(ids)) < len(ids):
        raise CommandError(f"a movement is named twice; ids are {', '.join(ids)}")
    if out.resolve() == tunes_in.resolve():
        raise CommandError("--out is the folder with the tunes; give one of its own for the discs")
    tunes = sorted(_tunes(tunes_in, besides=out))
    if not tunes:
        raise CommandError(f"there is no tune in {str(tunes_in)!r}: no name there ends in {' or '.join(SUFFIXES)}")
    folders = Counter(tune.with_suffix("") for tune in tunes)
    return [
        _Pair(
            tune=tune,
            movement=movement,
            out=out / _name(tune, folders).relative_to(tunes_in) / movement.id,
        )
        for tune in tunes
        for movement in movements
    ]


def _name(tune: Path, folders: Counter[Path]) -> Path:
    # Two tunes that differ in their ending alone keep it, so that each has a folder of its own.
    bare = tune.with_suffix("")
    return tune if folders[bare] > 1 else bare


def _tunes(tunes_in: Path, *, besides: Path) -> Iterator[Path]:
    # Discs of an earlier run may lie below the tunes; the tunes may lie below the discs too.
    left_out = besides.resolve() if besides.resolve().is_relative_to(tunes_in.resolve()) else None
    for path in tunes_in.rglob("*"):
        if path.suffix.lower() not in SUFFIXES or path.name.startswith(".") or not path.is_file():
            continue
        if left_out is None or left_out not in path.resolve().parents:
            yield path


def _told(outcomes: list[_Outcome], out: Path) -> dict[str, Any]:
    return {
        "good_to_cut": all(outcome.good_to_cut for outcome in outcomes),
        "counts": dict(sorted(Counter(outcome.what for outcome in outcomes).items())),
        "pairs": [
            {
                "tune": str(outcome.pair.tune),
                "movement": outcome.pair.movement.id,
                "folder": str(outcome.pair.out.relative_to(out)),
                "outcome": outcome.what,
                "good_to_cut": outcome.good_to_cut,
                "reason": outcome.reason,
            }
            for outcome in outcomes
        ],
    }


def _lines(outcomes: list[_Outcome], out: Path) -> list[str]:
    counts = Counter(outcome.what for outcome in outcomes)
    lines = [f"{len(outcomes)} pairs: {', '.join(f'{count} {what}' for what, count in sorted(counts.items()))}"]
    for outcome in outcomes:
        if not outcome.good_to_cut:
            why = outcome.reason or f"see {outcome.pair.out / 'layout.json'}"
            lines.append(f"  {outcome.pair.tune} for {outcome.pair.movement.id}: {outcome.what}; {why}")
    return [*lines, f"the list of all is {out / LIST}"]
