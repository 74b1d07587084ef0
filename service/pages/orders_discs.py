"""What the pages of orders read from files: a disc of a plan as it was made, its cutter, the settings asked for."""

import json
from typing import Annotated

from pydantic import Field

from layout.documents import Cutter, read_cutter, read_movement
from layout.documents.reading import Part
from layout.file_names import HEARING_FILES
from service.api.models.orders import MOST_REVISION
from service.api.order_answers import file_address
from service.api.order_files import file_of
from service.orders.views import PlanView
from service.pages.disc_shown import Record, ShownDisc
from service.parts import Parts


class OrderDiscQuery(Part):
    """Which plan of an order a disc is shown of."""

    revision: Annotated[int, Field(ge=1, le=MOST_REVISION)] | None = Field(
        default=None, description="of the plan; the one in force if null"
    )


def disc_of_plan(parts: Parts, order_id: str, plan: PlanView, disc: int) -> ShownDisc:
    """A disc of a plan, as it was planned: nothing is laid out again.

    Args:
        parts: Read for files.
        order_id: Whose plan it is.
        plan: The plan.
        disc: Which of its discs, from 1.

    Raises:
        ProblemError: The plan has no such disc, or its files were deleted.
        StoreError: A file cannot be read.
    """
    layout = json.loads(parts.files.read(file_of(plan, disc, "layout.json").sha256))
    report = json.loads(parts.files.read(file_of(plan, disc, "report.json").sha256))
    base = file_address(order_id, plan.revision, disc, "hearing.wav")
    given = plan.released_at is not None and plan.superseded_at is None
    return ShownDisc(
        layout=layout,
        report=report,
        movement=read_movement(parts.files.read(plan.inputs["movement"]["sha256"])),
        cutter=read_cutter(parts.files.read(plan.inputs["cutter"]["sha256"])),
        files={
            file.name: file_address(order_id, plan.revision, disc, file.name)
            for file in plan.files
            if file.disc == disc and (given or not file.is_for_cutting)
        }
        | {name: file_address(order_id, plan.revision, disc, name) for name in HEARING_FILES},
        hearing={of: f"{base}?of={of}" for of in ("disc", "written")},
        despite_findings=None if layout["good_to_cut"] else plan.release_reason,
    )


def layouts_of(parts: Parts, plan: PlanView | None) -> dict[int, Record]:
    """The layout.json of each disc of a plan, by its number; none where the files were deleted.

    Raises:
        StoreError: A file cannot be read.
    """
    files = () if plan is None else plan.files
    return {file.disc: json.loads(parts.files.read(file.sha256)) for file in files if file.name == "layout.json"}


def cutter_of(parts: Parts, plan: PlanView) -> Cutter | None:
    """The cutter a plan was made for; None where what it was made from was deleted.

    Raises:
        StoreError: Its document cannot be read.
    """
    cutter = plan.inputs.get("cutter")
    return None if cutter is None or not plan.files else read_cutter(parts.files.read(cutter["sha256"]))


def settings_text(parts: Parts, plan: PlanView | None) -> str:
    """The settings a plan was made with, as they may be written anew; "" where there are none any more.

    Raises:
        StoreError: Their document cannot be read.
    """
    digest = None if plan is None or not plan.files else plan.inputs.get("settings_sha256")
    return "" if not digest else json.dumps(json.loads(parts.files.read(digest)), indent=2, ensure_ascii=False)
