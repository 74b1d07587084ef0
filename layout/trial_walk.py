"""The walk of a trial piece, composed once for the command and the service: documents in, files out."""

from layout.cut.piece import plan_piece
from layout.documents import Cutter, Movement
from layout.trial import TrialPiece, trial_piece
from layout.write import write_dxf
from layout.write.trial_json import write_trial_json
from layout.write.trial_sheet import write_trial_sheet
from layout.write.trial_svg import write_trial_svg

CUTTING_FILE = "trial-piece.dxf"
TRIAL_FILES = (CUTTING_FILE, "trial-piece.svg", "measure.pdf", "trial-piece.json")


def plan_trial(movement: Movement, cutter: Cutter) -> TrialPiece:
    """A movement's trial piece as it is cut.

    Raises:
        DocumentError: The cutter cannot make the movement's projections.
    """
    piece = trial_piece(movement, cutter)
    blank = movement.disc.model_copy(update={"features": piece.hub})
    cuts = plan_piece(piece.drawing, movement.model_copy(update={"disc": blank}), cutter)
    return piece.as_cut(cuts.drawing, held=cuts.held)


def trial_files(movement: Movement, cutter: Cutter) -> dict[str, bytes]:
    """The files of a movement's trial piece, by name, in the order of TRIAL_FILES.

    Raises:
        DocumentError: The cutter cannot make the movement's projections.
    """
    piece = plan_trial(movement, cutter)
    files = (
        write_dxf(piece.drawing, cutter),
        write_trial_svg(piece),
        write_trial_sheet(piece),
        write_trial_json(piece),
    )
    return dict(zip(TRIAL_FILES, files, strict=True))
