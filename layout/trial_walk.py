"""The walk of a trial piece, composed once for the command and the service: documents in, files out."""

from layout.documents import Cutter, Movement
from layout.trial import trial_piece
from layout.write import write_dxf
from layout.write.trial_json import write_trial_json
from layout.write.trial_sheet import write_trial_sheet

TRIAL_FILES = ("trial-piece.dxf", "measure.pdf", "trial-piece.json")


def trial_files(movement: Movement, cutter: Cutter) -> dict[str, bytes]:
    """The files of a movement's trial piece, by name, in the order of TRIAL_FILES.

    Raises:
        DocumentError: The cutter cannot make the movement's projections.
    """
    piece = trial_piece(movement, cutter)
    files = (write_dxf(piece.drawing, cutter), write_trial_sheet(piece), write_trial_json(piece))
    return dict(zip(TRIAL_FILES, files, strict=True))
