"""How long a door is fuzzed, and in how many processes."""

from pathlib import Path

import pytest

from tests.fuzz import __main__ as fuzz
from tests.fuzz.door import FULL


@pytest.mark.parametrize(
    ("codes", "asked_s", "ends_with"),
    [
        ([0], [100], 0),
        ([1], [100], 1),
        ([FULL, FULL, 0], [100, 70, 40], 0),  # each took 30 s
        ([FULL, FULL, FULL, FULL], [100, 70, 40, 10], 0),  # then the time is over
        ([FULL, 77], [100, 70], 1),
    ],
    ids=["to the end", "a fault", "full twice", "full till the end", "a fault in the second"],
)
def test_a_door_whose_process_is_full_is_fuzzed_on_in_another_for_the_time_that_is_left(
    monkeypatch: pytest.MonkeyPatch, codes: list[int], asked_s: list[int], ends_with: int
) -> None:
    at_s, given_s, left = [0.0], [], list(codes)

    def one_process(name: str, seconds: int, folder: str) -> int:
        given_s.append(seconds)
        at_s[0] += 30
        return left.pop(0)

    monkeypatch.setattr(fuzz, "_fuzzed_once", one_process)
    monkeypatch.setattr("tests.fuzz.__main__.time.monotonic", lambda: at_s[0])

    assert fuzz.fuzzed("a door", 100, "a folder") == ends_with
    assert (given_s, left) == (asked_s, [])


def test_a_fault_that_a_full_process_kept_is_a_fault_in_the_end(
    monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    codes = [FULL, 0]

    def one_process(name: str, seconds: int, folder: str) -> int:
        kept = Path(folder) / name / "found"
        kept.mkdir(parents=True, exist_ok=True)
        (kept / "slow.txt").write_text("3 s")
        return codes.pop(0)

    monkeypatch.setattr(fuzz, "_fuzzed_once", one_process)

    assert fuzz.fuzzed("a door", 100, str(tmp_path)) == 1
    assert codes == []
