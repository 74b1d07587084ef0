"""trial-piece.json: what to measure on a trial piece, for programs. Fields may be added, never renamed."""

from typing import Any

import numpy as np

from layout.documents.reading import FULL_TURN_DEG
from layout.trial.piece import Hits, TrialPiece
from layout.version import ENGINE_VERSION
from layout.write.json_lines import json_lines
from layout.write.numbers import DECIMALS_DEG, rounded

FORMAT = "discwright-trial-piece/1"


def write_trial_json(piece: TrialPiece) -> bytes:
    """The measure sheet as UTF-8 JSON, one step, hit or caution to a line."""
    return json_lines(trial_record(piece))


def trial_record(piece: TrialPiece) -> dict[str, Any]:
    """The measure sheet in plain dictionaries and lists, in the order it is written.

    A step names the document and the field that may need correcting (a JSON pointer, RFC 6901), and
    how. Places of hits are the drawing's: mirrored where it shows the star side; null on a laser.
    """
    return {
        "format": FORMAT,
        "movement": {"id": piece.movement_id, "revision": piece.movement_revision},
        "cutter": {"id": piece.cutter_id},
        "engine_version": ENGINE_VERSION,
        "material": piece.material,
        "thickness_mm": piece.thickness_mm,
        "drawn_from": piece.drawn_from,
        "edges": piece.edges,
        "web_mm": piece.web_mm,
        "ladders": [
            {"ladder": ladder.name, "tool": ladder.tool, "measure": ladder.measure, "step_count": len(ladder.steps)}
            for ladder in piece.ladders
        ],
        "steps": [
            {
                "ladder": ladder.name,
                "step": step.mark,
                "nominal_mm": step.nominal_mm,
                "document": step.document,
                "field": step.field,
                "how": ladder.how,
            }
            for ladder in piece.ladders
            for step in ladder.steps
        ],
        "hits": None if piece.hits is None else _hits(piece.hits),
        "not_tried": [{"what": left.what, "why": left.why} for left in piece.not_tried],
        "cautions": list(piece.cautions),
    }


def _hits(hits: Hits) -> list[dict[str, Any]]:
    x_mm, y_mm = hits.at_mm.T
    angle_deg = rounded(np.degrees(np.arctan2(y_mm, x_mm)) % FULL_TURN_DEG, DECIMALS_DEG) % FULL_TURN_DEG
    rows = zip(rounded(np.hypot(x_mm, y_mm)).tolist(), angle_deg.tolist(), rounded(hits.at_mm).tolist(), strict=True)
    return [
        {"sequence": place, "tool": hits.tool, "radius_mm": radius_mm, "angle_deg": angle, "x_mm": x, "y_mm": y}
        for place, (radius_mm, angle, (x, y)) in enumerate(rows, start=1)
    ]
