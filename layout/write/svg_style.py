"""How the picture of a disc looks: colours, line widths, letter sizes.

Colours are those of Okabe and Ito, "Color Universal Design" (2008), from memory: eight that people
with any colour vision tell apart. What a colour says is also said by a shape, a line or a word, so
that a black and white print loses nothing.

Widths and sizes are parts of the picture's width, so that a small disc and a large one look alike.
Where no ratio is named they are hundredths of it: at 400 pixels across, one is 4 pixels; on an A3
sheet, 2.97 mm.
"""

from dataclasses import dataclass
from types import MappingProxyType

from layout.check.finding import Level
from layout.cut.plan import LayerName

BLACK, WHITE = "#000000", "#ffffff"
ORANGE, SKY_BLUE, BLUISH_GREEN = "#e69f00", "#56b4e9", "#009e73"
BLUE, VERMILION = "#0072b2", "#d55e00"
SHEET, TRACK_GREY, WORD_GREY = "#f3f2ee", "#b5b3ac", "#55534d"

FONT = "Arial, Helvetica, 'Liberation Sans', 'DejaVu Sans', sans-serif"
TITLE_SIZE, VERDICT_SIZE, LEAD_SIZE, TEXT_SIZE, SMALL_SIZE = 4.4, 3.6, 2.4, 1.9, 1.6
EMPHASIS_WIDTH, FLAG_WIDTH = 0.16, 0.25  # of working edges, of the index mark
ROW_DASHES_RATIO = (0.012, 0.004, 0.002, 0.004)


@dataclass(frozen=True, slots=True, kw_only=True)
class LayerStyle:
    """How one layer is drawn.

    Attributes:
        title: What it is, in the legend and for screen readers.
        stroke: Line colour, or "none".
        fill: Colour inside, or "none".
        line_ratio: Line width, over the picture's width.
        dashes_ratio: Dash and gap lengths, over the picture's width; empty for a full line.
    """

    title: str
    stroke: str
    fill: str
    line_ratio: float
    dashes_ratio: tuple[float, ...] = ()


# In painting order, the last on top; those of OVER_EDGES above the working edges.
LAYER_STYLES: MappingProxyType[LayerName, LayerStyle] = MappingProxyType(
    {
        "RIM": LayerStyle(title="rim", stroke=BLACK, fill=SHEET, line_ratio=0.0016),
        "TRACKS": LayerStyle(title="track", stroke=TRACK_GREY, fill="none", line_ratio=0.0005),
        "AFTER_FORMING": LayerStyle(title="opening after forming", stroke="none", fill=SKY_BLUE, line_ratio=0.0),
        "SLITS": LayerStyle(title="slit", stroke=BLUE, fill="none", line_ratio=0.00035),
        "SLOTS": LayerStyle(title="slot", stroke=BLUE, fill="none", line_ratio=0.0006),
        "HITS": LayerStyle(title="hit", stroke=BLUE, fill="none", line_ratio=0.002),
        "HOLES": LayerStyle(title="hole", stroke=BLACK, fill=WHITE, line_ratio=0.0012),
        "LEADS": LayerStyle(title="lead-in", stroke=VERMILION, fill="none", line_ratio=0.0005),
        "FOLDS": LayerStyle(
            title="fold line", stroke=BLUISH_GREEN, fill="none", line_ratio=0.00035, dashes_ratio=(0.0012, 0.0008)
        ),
        "MARKS": LayerStyle(title="engraved mark", stroke=BLACK, fill="none", line_ratio=0.0009),
    }
)


OVER_EDGES: tuple[LayerName, ...] = ("FOLDS", "MARKS")


@dataclass(frozen=True, slots=True, kw_only=True)
class LevelStyle:
    """How a finding of one level is marked: its word, ring colour, dashes, and the badge of its number."""

    word: str
    ring: str
    dashes_ratio: tuple[float, ...]
    badge: str
    digits: str


LEVEL_STYLES: MappingProxyType[Level, LevelStyle] = MappingProxyType(
    {
        Level.ERROR: LevelStyle(word="Error", ring=VERMILION, dashes_ratio=(), badge=BLACK, digits=WHITE),
        Level.WARNING: LevelStyle(word="Warning", ring=ORANGE, dashes_ratio=(0.01, 0.005), badge=WHITE, digits=BLACK),
        Level.ADVICE: LevelStyle(
            word="Advice", ring=BLUISH_GREEN, dashes_ratio=(0.003, 0.0045), badge=WHITE, digits=BLACK
        ),
    }
)
