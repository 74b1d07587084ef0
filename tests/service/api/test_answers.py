"""JSON as it leaves the service: a quick way and a plain one, which give the same bytes."""

import json
from typing import Any

import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from layout.documents import read_settings, shipped_cutter, shipped_movement
from layout.walk import lay_out, told_of
from service.api import answers
from service.api.answers import json_bytes, json_bytes_of_read
from tests.service.shop import TUNE

# Of all sizes, and often where the two ways of writing one differ: from 1e-9 to 1e-4.
NUMBERS = st.one_of(
    st.floats(allow_nan=False, allow_infinity=False),
    st.floats(-2e-4, 2e-4),
    st.floats(1e15, 1e17),
    st.integers(),
    st.integers(-(2**70), 2**70),
)
TEXTS = st.text(st.characters(blacklist_categories=()), max_size=8)  # halves of surrogate pairs too
READ = st.recursive(
    st.one_of(st.none(), st.booleans(), NUMBERS, TEXTS),
    lambda inner: st.one_of(st.lists(inner, max_size=4), st.dictionaries(TEXTS, inner, max_size=4)),
    max_leaves=12,
)


@given(value=READ)
@example(value=0.0)
@example(value=[1e-4, 9.99e-5, 1e-5, 9.9e-6, 1e-6, 1e-9, 9.9e-10, 1e-10, 5e-324])
@example(value=[-1e-4, -9.99e-5, -1e-5, -1e-6, -1e-9, -1e-10, -0.0])
@example(value={"at": 1e-5, "of": 10.00001, "to": 100.0000000001})
@example(value=[1e15, 9999999999999998.0, 1e16, 1.5e22, 1.7976931348623157e308])
@example(value=[2**63, 2**64, -(2**63) - 1, 10**30])
@example(value={"a": "0.00001", "b": "1e-6,", "c": "1e-6\n", "d": [10.00001, "0.00001"], "e": 0.00001})
@example(value={"\ud800": "\udfff", "": [], "e-5": {}, "\x7f\x00\u2028": "0.00001"})
def test_what_was_read_is_written_as_anything_is(value: Any) -> None:
    assert json_bytes_of_read(value) == json_bytes(value)


@pytest.mark.parametrize("movement", ["fernhollow-31", "mossbrook-67", "tarnlight-17"])
def test_a_layout_is_told_the_quick_way_with_the_same_bytes(movement: str, monkeypatch: pytest.MonkeyPatch) -> None:
    laid_out = lay_out(TUNE, shipped_movement(movement), shipped_cutter("fibre-laser"), read_settings(b"{}"))
    layout = json.loads(told_of(laid_out)["layout.json"])
    plain = json_bytes({"layout": layout})

    monkeypatch.setattr(answers, "json_bytes", None)  # the slower way would call it

    assert json_bytes_of_read({"layout": layout}) == plain
