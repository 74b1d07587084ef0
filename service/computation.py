"""Parts of the computation that are asked for beside layouts, each imported when it is first asked for.

The computation takes a second to import, with its libraries for drawings; a service is to answer before that.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from service.importing import ONE_AT_A_TIME

if TYPE_CHECKING:
    from collections.abc import Mapping

    from layout.documents import Cutter, Movement, Settings
    from layout.documents.sheets import SheetJob
    from layout.hearing_walk import Asked, Bits, Hearing, Of, Output, Turn
    from layout.sheets.plan import SheetPlan


def check_tune(tune: bytes, settings: Settings) -> None:
    """As `layout.walk.check_tune`."""
    with ONE_AT_A_TIME:
        from layout.walk import check_tune as check  # noqa: PLC0415 -- as the module says

    check(tune, settings)


def plan_sheets(job: SheetJob, drawings: Mapping[str, bytes] | None = None) -> SheetPlan:
    """As `layout.sheet_walk.plan_sheets`."""
    with ONE_AT_A_TIME:
        from layout.sheet_walk import plan_sheets as plan  # noqa: PLC0415 -- as the module says

    return plan(job, drawings)


def sheet_files_of(plan: SheetPlan) -> dict[str, bytes]:
    """As `layout.sheet_walk.sheet_files_of`."""
    with ONE_AT_A_TIME:
        from layout.sheet_walk import sheet_files_of as files  # noqa: PLC0415 -- as the module says

    return files(plan)


def trial_files(movement: Movement, cutter: Cutter) -> dict[str, bytes]:
    """As `layout.trial_walk.trial_files`."""
    with ONE_AT_A_TIME:
        from layout.trial_walk import trial_files as files  # noqa: PLC0415 -- as the module says

    return files(movement, cutter)


def hearing_asked(of: Of, turn: Turn) -> Asked:
    """As `layout.hearing_walk.Asked`."""
    from layout.hearing_walk import Asked  # noqa: PLC0415 -- as the module says

    return Asked(of=of, turn=turn)


def hearing_of(layout_json: bytes, movement: Movement, asked: Asked) -> Hearing:
    """As `layout.hearing_walk.hearing_of`."""
    from layout.hearing_walk import hearing_of as hearing  # noqa: PLC0415 -- as the module says

    return hearing(layout_json, movement, asked)


def write_hearing(hearing: Hearing, file: Output, bits: Bits | None) -> None:
    """The hearing as WAV of so many bits, or as MIDI for None, as `layout.hearing_walk` writes them."""
    from layout.hearing_walk import write_hearing_midi, write_wav  # noqa: PLC0415 -- as the module says

    if bits is None:
        file.write(write_hearing_midi(hearing))
    else:
        write_wav(hearing, file, bits=bits)
