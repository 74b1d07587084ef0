"""The walk of a sheet job, composed once for the command and the service: job in, files out."""

from collections.abc import Mapping

from layout.documents.sheets import LIMITS, SheetJob
from layout.errors import DocumentError, DrawingReadError, Problem
from layout.file_names import PARTS_FILE, PLAN_FILE
from layout.limits import limits_told
from layout.mechanics.drawn import DrawnDisc
from layout.read_back.as_drawn import read_as_drawn
from layout.sheets import arrange_on_sheets
from layout.sheets.plan import SheetPlan
from layout.write.sheet_dxf import write_sheet_dxf
from layout.write.sheet_json import drawing_name, write_sheets_json
from layout.write.sheet_parts import write_parts

LIMITS_OF_SHEETS = limits_told(LIMITS, prefix="sheet_job_")


MIB = 2**20


def plan_sheets(job: SheetJob, drawings: Mapping[str, bytes] | None = None) -> SheetPlan:
    """The discs of a job on its stock.

    Args:
        job: What is wanted, and the stock.
        drawings: The disc.dxf of a disc by its id in the job; a disc without one is a plain circle.

    Raises:
        DocumentError: A drawing cannot be read, is not for cutting, or does not fit the job.
    """
    given = drawings or {}
    total_mib = sum(map(len, given.values())) / MIB
    if total_mib > LIMITS.drawing_mib:
        message = f"the drawings are {total_mib:.1f} MiB, {LIMITS.drawing_mib} are allowed; make several jobs of it"
        raise DocumentError(document="sheet job", problems=(Problem(pointer="/discs", message=message),))
    return arrange_on_sheets(job, {disc_id: _read(disc_id, dxf, job) for disc_id, dxf in sorted(given.items())})


def _read(disc_id: str, dxf: bytes, job: SheetJob) -> DrawnDisc:
    try:
        return read_as_drawn(dxf, job.layers)
    except DrawingReadError as error:
        problem = Problem(pointer="", message=str(error).removeprefix("drawing: "))
        raise DocumentError(document=f"drawing of {disc_id}", problems=(problem,)) from error


def sheet_files_of(plan: SheetPlan) -> dict[str, bytes]:
    """The files of a plan by name: the plan, the part list, and a drawing of every sheet that discs lie on.

    Args:
        plan: The plan; one in which discs are missing has files too, for those that are placed.
    """
    drawings = {drawing_name(number): write_sheet_dxf(plan, number) for number, _ in enumerate(plan.sheets, start=1)}
    return {PLAN_FILE: write_sheets_json(plan), PARTS_FILE: write_parts(plan)} | drawings
