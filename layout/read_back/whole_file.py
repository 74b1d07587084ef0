"""What a drawing's file says as a whole, beside the cuts that can be read."""

import io
from collections.abc import Iterator

from layout.check.finding import Code, Finding, Level, Place
from layout.documents.cutter import Cutter
from layout.read_back.entities import CUT_LAYERS, CutDrawing
from layout.read_back.limits import COMMENT_WIDTH, MOST_REASON

_MARK = "NOT GOOD TO CUT"  # stands in the head of a cutting file that was given although an error stood
_NEXT_OF_OURS = "discwright "  # how the comment begins that follows it in our files
_COMMENT = b"999"  # DXF reference: the group code of a comment


def findings_on_the_file(dxf: bytes, drawing: CutDrawing, cutter: Cutter) -> list[Finding]:
    """Whether the file is a cutting file, is marked, is damaged, or holds what is not read."""
    findings = []
    if drawing.record_layers:
        findings.append(_is_a_record(drawing.record_layers, cutter))
    reason = marked_reason(dxf)
    if reason is not None:
        findings.append(_is_marked(reason))
    if drawing.mended:
        message = "the file is damaged and was read as far as it goes; cuts may be missing"
        findings.append(_unknown(Level.WARNING, message, "save the drawing anew from the program that made it"))
    read = ", ".join(cutter.layer(ours).name for ours in CUT_LAYERS)
    for name, count in drawing.other_layers.items():
        message = f"layer {name} is none of this cutter's, and its entities ({count}) are not read; read are {read}"
        findings.append(_unknown(Level.WARNING, message, "check that nothing on it is to be cut"))
    for (ours, kind), count in drawing.strangers.items():
        message = (
            f"layer {cutter.layer(ours).name} has entities ({count}) of type {kind}, which cannot be read back; "
            f"{'points are' if ours == 'HITS' else 'polylines, circles, lines and arcs are'}"
        )
        findings.append(_unknown(Level.ERROR, message, "convert or explode them in the program that made them"))
    return findings


def _is_a_record(layers: dict[str, int], cutter: Cutter) -> Finding:
    held = ", ".join(f"{cutter.layer(ours).name} ({count})" for ours, count in layers.items())
    return _finding(
        Code.NOT_A_CUTTING_FILE,
        Level.ERROR,
        f"the drawing is a record, for reading, never for cutting: it has entities on {held}",
        "cut from disc.dxf, which holds only what is cut or marked",
    )


def _is_marked(reason: str) -> Finding:
    return _finding(
        Code.MARKED_NOT_GOOD,
        Level.ERROR,
        f"the file itself says {_MARK}: {reason or 'no reason stands there'}",
        "lay the tune out anew without that fault; what is cut does not show all of it, such as notes left out",
    )


def _unknown(level: Level, message: str, remedy: str) -> Finding:
    return _finding(Code.UNKNOWN_CUT, level, message, remedy)


def _finding(code: Code, level: Level, message: str, remedy: str) -> Finding:
    return Finding(
        code=code, level=level, message=message, measured=None, limit=None, unit="", at=Place(), remedy=remedy
    )


def marked_reason(dxf: bytes) -> str | None:
    """The reason beside the mark in the file's head; "" where the mark stands alone, None without a mark.

    Args:
        dxf: The file.
    """
    comments = head_comments(dxf)
    for line in comments:
        at = line.upper().find(_MARK)
        if at < 0:
            continue
        reason = line[at + len(_MARK) :]
        for following in comments:
            had_room = len(line) + 1 + len(following.split(" ")[0]) <= COMMENT_WIDTH
            if had_room or following.startswith(_NEXT_OF_OURS):
                break
            reason, line = f"{reason} {following}", following  # noqa: PLW2901 - the reason goes on
        return reason.strip(": ")[:MOST_REASON]
    return None


def head_comments(dxf: bytes) -> Iterator[str]:
    """Comments before the first section, in printable characters.

    Args:
        dxf: The file.
    """
    lines = io.BytesIO(dxf)
    while lines.readline().strip() == _COMMENT:
        text = lines.readline().decode("utf-8", errors="replace").strip()
        yield "".join(letter if letter.isprintable() else "?" for letter in text)
