"""What of the marks on a disc finds no room is named, and nothing else."""

import numpy as np
import pytest

from layout.cut import plan_cuts
from layout.cut.labelling import marks_without_room
from layout.cut.plan import Lettering
from layout.cut.wording import Words
from layout.documents import Cutter, Movement
from layout.place.disc import Disc
from tests.layout.examples import LASER, PLAIN, SHIPPED, cutter_with, disc_of, movement_with

# A ring of metal of 4 mm, with an opening every 2 mm or so all round.
FULL = movement_with(
    {
        "disc/outer_diameter_mm": 20,
        "disc/centre_hole_mm": 12,
        "tracks": [{"track": 1, "radius_mm": 8}],
        "teeth": [{"tooth": 1, "track": 1, "pitch": "C5"}],
        "star_wheel": {"engagement_arc_mm": 3.2, "release_arc_mm": 0.0, "thickness_mm": 0.4},
    }
)
ALL_ROUND = [(1, float(sounds_s)) for sounds_s in np.arange(0.0, 60.0, 2.4)]
WITHOUT_LABELS = cutter_with({"labels": False})
FROM_THE_STAR_SIDE = cutter_with({"drawn_from": "star-side", "kerf_compensated": True})


def words_with(*, title: str = "The Mill", not_good: str | None = None, fingerprint: str = "0123456789abcdef") -> Words:
    return Words(
        title=title,
        fingerprint=fingerprint,
        not_good=not_good,
        is_record=False,
        part="disc 2 of 3",
        order_number="2026-118",
    )


def test_where_all_marks_stand_none_is_named() -> None:
    assert marks_without_room(disc_of(PLAIN, [(1, 1.0)]), words_with()) == ()


def test_every_mark_that_finds_no_room_is_named_the_index_mark_first() -> None:
    disc = disc_of(FULL, ALL_ROUND)

    assert marks_without_room(disc, words_with(not_good="")) == (
        "index mark",
        "warning NOT GOOD TO CUT",
        "side",
        "disc of the set",
        "movement",
        "order number",
        "burr side",
        "fingerprint",
        "title",
    )


def test_a_cutter_without_labels_misses_the_index_mark_alone() -> None:
    assert marks_without_room(disc_of(FULL, ALL_ROUND, WITHOUT_LABELS), words_with()) == ("index mark",)


@pytest.mark.parametrize("cutter", [LASER, FROM_THE_STAR_SIDE])
@pytest.mark.parametrize("movement", [PLAIN, *SHIPPED, FULL], ids=lambda movement: movement.id)
def test_what_is_named_and_what_is_lettered_are_all_there_is(movement: Movement, cutter: Cutter) -> None:
    disc = disc_of(movement, [(1, 1.0), (1, 20.0)], cutter)

    missing = marks_without_room(disc, words_with())

    # Side, part, movement, order, burr, fingerprint and title; and the compensated kerf where it is told.
    wanted = 7 + cutter.kerf_compensated
    assert lettered_count(disc) == wanted - len([name for name in missing if name != "index mark"])


def lettered_count(disc: Disc) -> int:
    plan = plan_cuts(
        disc,
        title="The Mill",
        fingerprint="0123456789abcdef",
        not_good=None,
        part="disc 2 of 3",
        order_number="2026-118",
    )
    return sum(isinstance(entity, Lettering) for entity in plan.disc.entities)


def test_an_empty_fingerprint_is_neither_lettered_nor_told_at_the_head() -> None:
    plan = plan_cuts(disc_of(PLAIN, [(1, 1.0)]), title="The Mill", fingerprint="", not_good=None)

    texts = [entity.text for entity in plan.disc.entities if isinstance(entity, Lettering)]
    assert texts == ["The Mill", "plain-3 rev 1", "LABEL SIDE", "BURR ON STAR SIDE"]
    assert not any(line.startswith("fingerprint") for line in plan.disc.comments)
