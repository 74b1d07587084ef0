from layout.arrange.broken import broken_by
from tests.layout.arrange.by_hand import Asked, beside, drive_of, problem_with


def test_nothing_chosen_breaks_nothing() -> None:
    plucks = [Asked(at_ms=1000), Asked(at_ms=1000, tracks=(1,))]
    problem = problem_with(plucks, least_ms=(1, 1), besides=(beside(-1, 1),), drive=drive_of((60, 60), 10, 100))

    assert broken_by(problem, ()) == []


def test_webs_and_loads_are_told_together_and_moments_only_where_nothing_else_is_broken() -> None:
    # Both at 1000 ms: no web between them, and 60 + 60 of 100. The next on track 0 comes 50 of 100 ms later.
    plucks = [Asked(at_ms=1000), Asked(at_ms=1000, tracks=(1,)), Asked(at_ms=1050)]
    problem = problem_with(plucks, least_ms=(100, 100), besides=(beside(-1, 1),), drive=drive_of((60, 60), 10, 100))

    assert broken_by(problem, (0, 1, 2)) == [(0, 1), (0, 1)]
    assert broken_by(problem, (0, 2)) == [(0, 2)]
    assert broken_by(problem, (1, 2)) == []
