"""The walk of a sheet job, composed once for the command and the service: job in, files out."""

from layout.documents.sheets import LIMITS, SheetJob
from layout.limits import limits_told
from layout.sheets import arrange_on_sheets
from layout.sheets.plan import SheetPlan
from layout.write.sheet_dxf import write_sheet_dxf
from layout.write.sheet_json import drawing_name, write_sheets_json
from layout.write.sheet_parts import write_parts

PLAN_FILE, PARTS_FILE = "sheets.json", "parts.csv"

LIMITS_OF_SHEETS = limits_told(LIMITS, prefix="sheet_job_")


def plan_sheets(job: SheetJob) -> SheetPlan:
    """The discs of a job on its stock.

    Args:
        job: What is wanted, and the stock.
    """
    return arrange_on_sheets(job)


def sheet_files_of(plan: SheetPlan) -> dict[str, bytes]:
    """The files of a plan by name: the plan, the part list, and a drawing of every sheet that discs lie on.

    Args:
        plan: The plan; one in which discs are missing has files too, for those that are placed.
    """
    drawings = {drawing_name(number): write_sheet_dxf(plan, number) for number, _ in enumerate(plan.sheets, start=1)}
    return {PLAN_FILE: write_sheets_json(plan), PARTS_FILE: write_parts(plan)} | drawings
