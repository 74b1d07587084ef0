import math

import pytest

from layout.arrange.passage import PassageTimes, passage_of
from layout.documents.settings_passage import Passage
from layout.errors import DocumentError
from tests.layout.arrange.small_comb import score_of


def test_a_bar_of_a_tune_without_notes_has_four_beats_and_its_end() -> None:
    silent = score_of([])

    # 4/4 at 120: bar 3 begins at 4 s and ends at 6.
    passage = passage_of(silent, Passage(from_bar=3, from_beat=4, to_bar=3, to_beat=5))
    assert passage == PassageTimes(from_s=5.5, to_s=6.0)
    with pytest.raises(DocumentError, match=r"bar 3 has 4 beats, so its beat may be 1 to 5 \(its end\), got 6"):
        passage_of(silent, Passage(from_bar=3, from_beat=6))


def test_without_an_end_a_passage_ends_with_the_tune() -> None:
    assert passage_of(score_of([(2.0, "C4")]), Passage()) == PassageTimes(from_s=2.0, to_s=math.inf)
    assert passage_of(score_of([]), Passage()) == PassageTimes(from_s=0.0, to_s=math.inf)
