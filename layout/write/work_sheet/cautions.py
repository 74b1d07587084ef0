"""What can hurt whoever makes or plays the disc."""

from layout.place.disc import Disc
from layout.write.work_sheet.paper import SMALL, STRONG, Area, Paper, headed, written

_GAP_MM = 0.7

# Limit and source: OSHA, 29 CFR 1910.1000 Table Z-1 (zinc oxide fume, 8 h mean); metal fume fever, its onset and
# the need for extraction: American Welding Society, Safety and Health Fact Sheet 25.
ZINC = (
    "Zinc-coated sheet gives off zinc oxide fume when it is cut by heat, which brings on metal fume fever some hours "
    "later (AWS fact sheet 25): only with extraction at the cut. Limit 5 mg/m³ over 8 h in the USA (OSHA, "
    "29 CFR 1910.1000, Table Z-1); yours may be lower."
)
LASER = (
    ("Laser", "Closed, interlocked machine only. Never look into the beam or its reflection: bright metal mirrors it."),
    ("Fume", "Extract and filter the fume of any sheet, oil and coating. Watch for fire in the slugs."),
    ("Zinc", ZINC),
)
PRESS = (
    ("Press", "Guards on and tried. No hand between punch and die; locked out and still before a tool is changed."),
    ("Eyes and ears", "Slugs and broken punches fly: glasses. A press is loud: ear protection."),
)
ALWAYS = (
    (
        "Sharp edges",
        "Cut sheet, tabs and slugs cut skin: gloves and glasses till deburred. Never gloves near a turning tool.",
    ),
    (
        "Wound spring",
        "Let the spring down wholly first. Never take out comb, brake or governor under a wound spring: the train runs "
        "away and breaks, and throws teeth and parts.",
    ),
    (
        "Who",
        "For trained people. Local rules, the machine's own instructions and the material's data sheet come first.",
    ),
)


def cautions_for(disc: Disc) -> tuple[tuple[str, str], ...]:
    """The cautions for a disc's cutter: each a name and what to do."""
    return (*(LASER if disc.cutter.kind == "laser" else PRESS), *ALWAYS)


def cautions_written(paper: Paper, area: Area, disc: Disc) -> Area:
    """Writes the cautions, and gives what is left."""
    area = headed(paper, area, "Cautions")
    for name, text in cautions_for(disc):
        area = written(paper, area, name, STRONG, most_lines=1)
        area = written(paper, area, text, SMALL).below(_GAP_MM)
    return area
