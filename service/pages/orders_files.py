"""What the page of an order says of its discs and their files: what is kept and found, and who is given what."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from layout.file_names import FILES, HEARING_FILES
from service.api.order_answers import file_address
from service.orders.states import State
from service.orders.views import OrderView, PlanView
from service.pages.disc_shown import Record
from service.pages.disc_told import FindingTold, findings_of
from service.pages.texts import text_of

MINUTE_S, HOUR_S = 60, 3600


@dataclass(frozen=True, slots=True, kw_only=True)
class DiscTold:
    """A disc of the plan in force: its page, its picture, what is kept, what it costs, what was found."""

    number: int
    of: int
    address: str
    picture: str
    good_to_cut: bool
    lines: tuple[str, ...]
    findings: tuple[tuple[str, tuple[FindingTold, ...]], ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class FileOfPlan:
    """A file of the plan in force: where it is (None where it is not given), how large, what it is, who wants it."""

    name: str
    address: str | None
    kilobytes: str
    what: str
    who: str


@dataclass(frozen=True, slots=True, kw_only=True)
class FilesTold:
    """The files of an order's plan in force.

    Attributes:
        standing: Whether they may be cut from, in a sentence.
        is_given: Whether cutting files are.
        may_be_cut: Whether they are, or may still be.
        kept_back: What stands where a cutting file is not given.
        by_disc: The files of each disc, in the order of `layout.file_names.FILES`.
    """

    standing: str
    is_given: bool
    may_be_cut: bool
    kept_back: str
    by_disc: tuple[tuple[int, tuple[FileOfPlan, ...]], ...]


def discs_told(order: OrderView, told: Mapping[str, Any], layouts: Mapping[int, Record]) -> tuple[DiscTold, ...]:
    """The discs of the plan in force; none before the first plan, and once the files are deleted.

    Args:
        order: The order.
        told: The same as the API tells it.
        layouts: The layout.json of each disc, by its number.
    """
    plan = order.plan
    if plan is None or not plan.files:
        return ()
    pictures = {file["disc"]: file["href"] for file in told["plan"]["files"] if file["name"] == "disc.svg"}
    return tuple(
        DiscTold(
            number=disc["number"],
            of=disc["of"],
            address=f"/orders/{order.id}/discs/{disc['number']}",
            picture=pictures[disc["number"]],
            good_to_cut=disc["good_to_cut"],
            lines=tuple(_disc_lines(disc)),
            findings=findings_of(layouts[disc["number"]]),
        )
        for disc in plan.told["discs"]
    )


def files_told(order: OrderView, told: Mapping[str, Any]) -> FilesTold | None:
    """The files of the plan in force, each with what it is and who wants it; None where there are none.

    Args:
        order: The order.
        told: The same as the API tells it.
    """
    plan = order.plan
    if plan is None or not plan.files:
        return None
    standing = _standing(order, plan)
    files = sorted(told["plan"]["files"], key=lambda file: (file["disc"], FILES.index(file["name"])))
    discs = dict.fromkeys(file["disc"] for file in files)
    is_given = standing == "released"
    return FilesTold(
        standing=text_of(f"orders.files_{standing}"),
        is_given=is_given,
        may_be_cut=standing not in ("superseded", "cancelled"),
        kept_back=text_of("orders.file_after_release" if standing == "before" else "orders.file_not_to_cut"),
        by_disc=tuple(
            (
                disc,
                (
                    *(_file(file, is_given=is_given) for file in files if file["disc"] == disc),
                    *(_sound(order.id, plan.revision, disc, name) for name in HEARING_FILES),
                ),
            )
            for disc in discs
        ),
    )


def _standing(order: OrderView, plan: PlanView) -> str:
    """Whether a plan may be cut from: a released plan that was superseded or called back never may again."""
    if order.state == State.CANCELLED:
        return "cancelled"
    if plan.superseded_at is not None:
        return "superseded"
    if plan.released_at is not None:
        return "released"
    return "before" if any(file.is_for_cutting for file in plan.files) else "not_made"


def _file(file: Mapping[str, Any], *, is_given: bool) -> FileOfPlan:
    key = f"disc.file_{file['name'].replace('-', '_').replace('.', '_')}"
    return FileOfPlan(
        name=file["name"],
        address=file["href"] if is_given or not file["for_cutting"] else None,
        kilobytes=text_of("orders.file_size", kilobytes=f"{file['byte_count'] / 1000:.1f}"),
        what=text_of(key),
        who=text_of(f"{key}_who"),
    )


def _sound(order_id: str, revision: int, disc: int, name: str) -> FileOfPlan:
    """How a disc sounds: made from the plan whenever it is asked for, so that it has no size of its own."""
    key = f"disc.file_{name.replace('.', '_')}"
    return FileOfPlan(
        name=name,
        address=file_address(order_id, revision, disc, name),
        kilobytes=text_of("orders.file_size_made"),
        what=text_of(key),
        who=text_of(f"{key}_who"),
    )


def _disc_lines(disc: Mapping[str, Any]) -> list[str]:
    lines = [text_of("orders.disc_kept", kept=disc["kept_count"], asked=disc["asked_count"])]
    if disc["time_s"] is not None:
        lines.append(text_of("orders.disc_time", time=_time(disc["time_s"])))
    if disc["price"] is not None:
        lines.append(text_of("orders.disc_price", **disc["price"]))
    return lines


def _time(time_s: float) -> str:
    if time_s < MINUTE_S:
        return f"{time_s:.0f} s"
    if time_s < HOUR_S:
        return f"{time_s / MINUTE_S:.0f} min"
    return f"{time_s / HOUR_S:.1f} h"
