"""From an order's inputs to its plan: the walk, and its files kept by their digests."""

import hashlib
import json
import time
from collections.abc import Mapping, Sequence
from typing import Any

from layout.documents import Cutter, Movement, read_cutter, read_movement, read_settings
from layout.file_names import CUTTING_FILES, FILES
from layout.version import ENGINE_VERSION
from service.download_names import NamedDisc, download_name
from service.media_types import MEDIA_TYPES
from service.orders.planned import OrderInputs, PlannedFile, PlannedOrder
from service.planner import AnyPlanner, Layout
from service.store.holds import FileKeeper

LEVELS = ("error", "warning", "advice")


def plan_order(inputs: OrderInputs, planner: AnyPlanner, keeper: FileKeeper) -> PlannedOrder:
    """The plan of an order; doing it twice gives the same plan and keeps nothing twice.

    Args:
        inputs: What was ordered.
        planner: The computation.
        keeper: Keeps the files.

    Raises:
        LayoutError: The tune or a document cannot be used.
        StoreError: The files could not be kept.
    """
    movement, cutter = read_movement(inputs.movement), read_cutter(inputs.cutter)
    settings = read_settings(inputs.settings)
    layouts = planner.lay_out_discs(inputs.tune, movement, cutter, settings, time.monotonic)
    contents = [planner.files_of(laid_out, not_good=inputs.not_good) for laid_out in layouts]
    reports = [json.loads(content["report.json"]) for content in contents]
    return PlannedOrder(
        engine_version=ENGINE_VERSION,
        good_to_cut=all(laid_out.good_to_cut for laid_out in layouts),
        lost_share=_lost_share(reports),
        told={
            "title": layouts[0].title,
            "discs": [_disc_told(*one) for one in zip(layouts, contents, reports, strict=True)],
        },
        files=tuple(
            kept
            for laid_out, content in zip(layouts, contents, strict=True)
            for kept in _kept(laid_out, content, (movement, cutter), keeper)
        ),
    )


def _lost_share(reports: Sequence[Mapping[str, Any]]) -> float:
    asked = sum(report["total"]["asked_weight"] for report in reports)
    kept = sum(report["total"]["kept_weight"] for report in reports)
    return 1 - kept / asked if asked else 1.0


def _disc_told(laid_out: Layout, content: Mapping[str, bytes], report: Mapping[str, Any]) -> dict[str, Any]:
    layout = json.loads(content["layout.json"])
    findings = layout["findings"]
    making = json.loads(content["making.json"])
    return {
        "number": laid_out.disc_number,
        "of": laid_out.disc_count,
        "fingerprint": laid_out.fingerprint,
        "layout_sha256": _without_reason(layout),
        "good_to_cut": laid_out.good_to_cut,
        "findings": {level: sum(finding["level"] == level for finding in findings) for level in LEVELS},
        "worth": report["worth"],
        "asked_count": report["total"]["note_count"],
        "kept_count": report["total"]["kept_count"],
        "time_s": making["time_s"],
        "price": None if making["total"] is None else {"amount": making["total"], "currency": making["currency"]},
    }


def _without_reason(layout: Mapping[str, Any]) -> str:
    """A digest of all that was laid out and found, but not of why it is made despite that: the same disc, or not."""
    told = {name: value for name, value in layout.items() if name != "despite_findings"}
    return hashlib.sha256(json.dumps(told, sort_keys=True).encode()).hexdigest()


def _kept(
    laid_out: Layout, content: Mapping[str, bytes], documents: tuple[Movement, Cutter], keeper: FileKeeper
) -> list[PlannedFile]:
    movement, cutter = documents
    part = "" if laid_out.disc_count == 1 else f"disc {laid_out.disc_number} of {laid_out.disc_count}"
    named = NamedDisc(
        title=laid_out.title,
        movement=movement,
        cutter=cutter,
        fingerprint=laid_out.fingerprint,
        not_good=not laid_out.good_to_cut,
        part=part,
    )
    names = [name for name in FILES if name in content]
    digests = keeper.keep([content[name] for name in names])
    return [
        PlannedFile(
            disc=laid_out.disc_number,
            name=name,
            digest=digest,
            byte_count=len(content[name]),
            media_type=MEDIA_TYPES[name],
            saved_as=download_name(named, name),
            is_for_cutting=name in CUTTING_FILES,
        )
        for name, digest in zip(names, digests, strict=True)
    ]
