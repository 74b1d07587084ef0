from layout.arrange.budget import Budget
from layout.arrange.solving import Solved, Solving
from tests.layout.arrange.by_hand import Asked, drive_of, problem_with


def test_a_part_not_followed_in_all_its_states_is_still_chosen_better_than_by_hand() -> None:
    # By hand the heaviest comes first, and leaves room for neither of the two beside it.
    plucks = [Asked(at_ms=at_ms, worth=worth, nudge_ms=0) for at_ms, worth in ((1000, 10), (1060, 15), (1120, 10))]

    solved = Solving(problem_with(plucks)).together(Budget(states=0))

    assert isinstance(solved, Solved)
    assert (solved.spots, solved.worth, solved.bound) == ((0, 2), 20, 20)


def test_nothing_to_play_is_solved_by_nothing_with_a_drive_and_without() -> None:
    for drive in (None, drive_of((100,), 10, 50)):
        silent = [Asked(at_ms=1000, tracks=())]

        solved = Solving(problem_with(silent, drive=drive)).together(Budget())

        assert isinstance(solved, Solved)
        assert (solved.spots, solved.worth, solved.bound) == ((), 0, 0)
        assert solved.playing.too_heavy == ()
