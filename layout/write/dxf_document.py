"""An empty DXF document, and its bytes: the same on every run and machine.

ezdxf stamps a document with the time, random identifiers and its own version whenever its `write`
is called, unless a switch of the whole process is set. So `write` is not called here: its three
steps are taken one by one, and between them the stamps are put right on this one document.
"""

import io
import textwrap
from datetime import datetime
from typing import Literal

from ezdxf.document import CONST_GUID, EZDXF_META, Drawing
from ezdxf.lldxf.const import DXF12
from ezdxf.lldxf.tagwriter import TagWriter
from ezdxf.tools.juliandate import juliandate
from ezdxf.units import MM

from layout.mechanics.arrays import FloatArray
from layout.write.plain_text import dxf_text

_COMMENT = "999\n{}\n"  # DXF reference: group code 999 is a comment, may stand before the sections
_COMMENT_WIDTH = 200  # characters; a DXF line of R2010 holds 2049 bytes, seven for one character at most
EZDXF_APP = "EZDXF"  # under which the library marks a document as its own
_NO_MOMENT = juliandate(datetime(2000, 1, 1))  # any fixed day would do
_MOMENTS = ("$TDCREATE", "$TDUCREATE", "$TDUPDATE", "$TDUUPDATE")
_IDENTIFIERS = ("$FINGERPRINTGUID", "$VERSIONGUID")
_DECIMAL_LENGTHS, _DECIMAL_DEGREES = 2, 0  # $LUNITS, $AUNITS
_DECIMALS_SHOWN = 3  # $LUPREC, $AUPREC: what a drawing program shows, not what the file holds


Release = Literal["R2010", "R12"]


def new_document(extents_mm: FloatArray, release: Release = "R2010") -> Drawing:
    """An empty document in millimetres, with nothing but the layer 0.

    Args:
        extents_mm: Shape (2, 2). Corners of what will be drawn; the view opens on them.
        release: Of the DXF format. R12 has no place for the unit of length; a comment has to say it.
    """
    document = Drawing.new(release)  # not its `new`, which warns on standard error that R12 has no units
    if release != "R12":
        document.units = MM
    if document.layers.has_entry("Defpoints"):  # made by ezdxf for dimensions, of which we draw none
        document.layers.remove("Defpoints")
    header = document.header
    header["$MEASUREMENT"] = 1
    header["$LUNITS"], header["$AUNITS"] = _DECIMAL_LENGTHS, _DECIMAL_DEGREES
    header["$LUPREC"], header["$AUPREC"] = _DECIMALS_SHOWN, _DECIMALS_SHOWN
    lower, upper = extents_mm.tolist()
    space = document.modelspace()
    space.reset_extents((*lower, 0), (*upper, 0))
    space.reset_limits(lower, upper)
    middle, size = extents_mm.mean(axis=0).tolist(), float(max(extents_mm[1] - extents_mm[0]))
    document.set_modelspace_vport(height=size or 1.0, center=middle)
    return document


def bytes_of(document: Drawing, comments: tuple[str, ...]) -> bytes:
    """The document as ASCII DXF, with the comments at its head.

    Args:
        document: A document of new_document, drawn in.
        comments: Lines of text; long ones are broken.
    """
    document.commit_pending_changes()
    document.update_all()
    # The library collects the classes it needs in a set, whose order is that of the hash seed.
    document.classes.classes = dict(sorted(document.classes.classes.items()))
    _unstamp(document)
    file = io.BytesIO()
    text = io.TextIOWrapper(file, encoding="ascii", newline="")
    for comment in comments:
        for line in textwrap.wrap(comment, _COMMENT_WIDTH):
            text.write(_COMMENT.format(dxf_text(line)))
    document.export_sections(TagWriter(text, write_handles=True, dxfversion=document.dxfversion))
    text.detach()
    return file.getvalue()


def _unstamp(document: Drawing) -> None:
    header = document.header
    for name in _MOMENTS:
        header[name] = _NO_MOMENT
    for name in _IDENTIFIERS:
        header[name] = CONST_GUID
    header["$LASTSAVEDBY"] = "discwright"
    if document.dxfversion == DXF12:
        marked = document.modelspace().block_record.block
        if marked is not None:
            marked.discard_xdata(EZDXF_APP)
    else:
        meta = document.rootdict.get_required_dict(EZDXF_META)
        document.rootdict.discard(EZDXF_META)
        document.objects.delete_entity(meta)  # and with it the entries it owns
    document.appids.remove(EZDXF_APP)
