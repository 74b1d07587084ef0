import subprocess
import sys
from itertools import product
from random import Random

import numpy as np
import pytest

from layout.arrange.integer_program import IntegerProgram, Row
from layout.arrange.linear_program import least_cost

MOST_NODES = 1000


def worth_of(*worths: int) -> np.ndarray[tuple[int], np.dtype[np.int64]]:
    return np.array(worths, dtype=np.int64)


def test_the_best_columns_within_the_rows_are_taken() -> None:
    # 3 + 4 beat 5; the first two exclude the third.
    program = IntegerProgram(worth_of(3, 4, 5), [Row(columns=[0, 2], most=1), Row(columns=[1, 2], most=1)])

    answer = program.solve(most_nodes=MOST_NODES, most_s=None)

    assert answer.ones is not None
    assert (answer.ones.tolist(), answer.bound, answer.finished) == ([0, 1], 7, True)


def test_coefficients_and_least_sums_count() -> None:
    # 3·a + 2·b + 2·c ≤ 4 lets b and c, or a; a + d ≥ 1 with d worth −1 asks for a, or pays for d.
    rows = [Row(columns=[0, 1, 2], coefficients=[3, 2, 2], most=4), Row(columns=[0, 3], least=1)]
    program = IntegerProgram(worth_of(5, 4, 4, -1), rows)

    answer = program.solve(most_nodes=MOST_NODES, most_s=None)

    assert answer.ones is not None
    assert (answer.ones.tolist(), answer.bound) == ([1, 2, 3], 7)


def test_rows_added_later_hold_too() -> None:
    program = IntegerProgram(worth_of(3, 4), [])
    first = program.solve(most_nodes=MOST_NODES, most_s=None)

    program.add([Row(columns=[0, 1], most=1), Row(columns=[0, 1], coefficients=[1, 2], most=1)])
    second = program.solve(most_nodes=MOST_NODES, most_s=None)

    assert first.ones is not None
    assert second.ones is not None
    assert (first.ones.tolist(), first.bound) == ([0, 1], 7)
    assert (second.ones.tolist(), second.bound) == ([0], 3)


def test_rows_that_contradict_each_other_have_no_solution_and_no_bound() -> None:
    program = IntegerProgram(worth_of(1, 1), [Row(columns=[0, 1], least=2), Row(columns=[0, 1], most=1)])

    answer = program.solve(most_nodes=MOST_NODES, most_s=None)

    assert (answer.ones, answer.bound, answer.finished) == (None, None, True)


def a_hard_one(seed: int, count: int) -> tuple[np.ndarray[tuple[int], np.dtype[np.int64]], list[Row]]:
    """Columns with random rows of three of which one, or two, may be taken."""
    random = Random(seed)
    rows = [Row(columns=random.sample(range(count), 3), most=random.choice((1, 1, 2))) for _ in range(2 * count)]
    return worth_of(*(random.randint(50, 60) for _ in range(count))), rows


def most_by_trial(worth: np.ndarray[tuple[int], np.dtype[np.int64]], rows: list[Row]) -> int:
    ways = np.array(list(product((0, 1), repeat=len(worth))))
    allowed = np.all([ways[:, list(row.columns)].sum(axis=1) <= row.most for row in rows], axis=0)
    return int((ways[allowed] @ worth).max())


@pytest.mark.parametrize("seed", range(5))
def test_the_answer_is_that_of_trying_every_combination(seed: int) -> None:
    worth, rows = a_hard_one(seed, 14)

    answer = IntegerProgram(worth, rows).solve(most_nodes=MOST_NODES, most_s=None)

    assert answer.ones is not None
    assert answer.bound == int(worth[answer.ones].sum()) == most_by_trial(worth, rows)


def test_a_search_without_nodes_says_that_it_is_not_finished_and_its_bound_is_true() -> None:
    worth, rows = a_hard_one(1, 200)
    best = IntegerProgram(worth, rows).solve(most_nodes=100_000, most_s=None)

    stopped = IntegerProgram(worth, rows).solve(most_nodes=0, most_s=None)

    assert best.finished
    assert best.bound is not None
    assert not stopped.finished
    assert stopped.bound is None or stopped.bound >= best.bound
    assert stopped.nodes >= 1


def a_harder_one() -> tuple[np.ndarray[tuple[int], np.dtype[np.int64]], list[Row]]:
    """Sixty columns and 480 rows of five, of which one, or two, may be taken: 2,400 entries, and several nodes."""
    random = Random(1)
    rows = [Row(columns=random.sample(range(60), 5), most=random.choice((1, 1, 2))) for _ in range(480)]
    return worth_of(*(random.randint(50, 60) for _ in range(60))), rows


def test_a_search_that_is_stopped_gives_what_it_found_and_a_bound_above_the_best() -> None:
    worth, rows = a_harder_one()
    best = IntegerProgram(worth, rows).solve(most_nodes=MOST_NODES, most_s=None)
    assert best.ones is not None
    assert (best.bound, best.finished) == (int(worth[best.ones].sum()), True)

    stopped = IntegerProgram(worth, rows).solve(most_nodes=2, most_s=None)

    assert stopped.ones is not None
    assert stopped.bound is not None
    assert not stopped.finished
    taken = np.zeros(60)
    taken[stopped.ones] = 1
    assert all(taken[list(row.columns)].sum() <= row.most for row in rows)
    assert 0 < worth[stopped.ones].sum() < best.bound < stopped.bound
    # Each node counts for 1 + 2,400 // 1,000 = 3.
    assert stopped.nodes in (3, 6)


def test_a_program_that_was_stopped_is_solved_when_asked_again_and_the_same_each_time() -> None:
    worth, rows = a_harder_one()
    asked_anew = IntegerProgram(worth, rows).solve(most_nodes=MOST_NODES, most_s=None)
    program = IntegerProgram(worth, rows)

    assert not program.solve(most_nodes=1, most_s=0.0).finished
    for _ in range(2):
        answer = program.solve(most_nodes=MOST_NODES, most_s=None)
        assert answer.ones is not None
        assert asked_anew.ones is not None
        assert answer.ones.tolist() == asked_anew.ones.tolist()
        assert (answer.bound, answer.nodes, answer.finished) == (asked_anew.bound, asked_anew.nodes, True)


@pytest.mark.parametrize(("most_nodes", "most_s"), [(0, None), (-1, None), (MOST_NODES, 0.0), (MOST_NODES, -1.0)])
def test_less_than_nothing_to_spend_is_nothing_and_nothing_is_known_then(most_nodes: int, most_s: float | None) -> None:
    answer = IntegerProgram(*a_harder_one()).solve(most_nodes=most_nodes, most_s=most_s)

    # no node was looked at, which counts as one
    assert (answer.ones, answer.bound, answer.nodes, answer.finished) == (None, None, 3, False)


def test_a_node_counts_once_more_for_every_thousand_entries_of_the_rows() -> None:
    program = IntegerProgram(worth_of(*[1] * 1000), [Row(columns=range(999), most=2000)])
    counted = [program.solve(most_nodes=MOST_NODES, most_s=None).nodes]

    for width in (1, 999, 1, 1000):  # 1,000 entries, 1,999, 2,000, 3,000
        program.add([Row(columns=range(width), most=2000)])
        counted.append(program.solve(most_nodes=MOST_NODES, most_s=None).nodes)

    assert counted == [1, 2, 2, 3, 4]


def test_a_search_without_time_says_that_it_is_not_finished() -> None:
    worth, rows = a_hard_one(1, 200)

    assert not IntegerProgram(worth, rows).solve(most_nodes=100_000, most_s=0.0).finished


def test_nothing_is_written_while_solving() -> None:
    # In a process of its own: what a library writes past Python's own streams is seen there too.
    program = (
        "import numpy as np\n"
        "from layout.arrange.integer_program import IntegerProgram, Row\n"
        "from layout.arrange.linear_program import least_cost\n"
        "worth = np.arange(50, 90)\n"
        "rows = [Row(columns=[n, (n * 7 + 3) % 40], most=1) for n in range(40) if n != (n * 7 + 3) % 40]\n"
        "IntegerProgram(worth, rows).solve(most_nodes=100, most_s=None)\n"
        "IntegerProgram(worth, [Row(columns=[0], least=2)]).solve(most_nodes=100, most_s=None)\n"
        "least_cost(worth.astype(float), np.zeros(40), np.ones(40), rows)\n"
    )

    ended = subprocess.run([sys.executable, "-c", program], capture_output=True, check=True, timeout=60)

    assert (ended.stdout, ended.stderr) == (b"", b"")


def test_a_linear_program_gives_the_cheapest_values() -> None:
    # x + y ≥ 1.5 at costs 1 and 3, x ≤ 1: x 1, y 0.5.
    values = least_cost(np.array([1.0, 3.0]), np.zeros(2), np.array([1.0, 5.0]), [Row(columns=[0, 1], least=1.5)])

    assert values is not None
    assert values.tolist() == pytest.approx([1.0, 0.5])


def test_a_linear_program_without_a_solution_gives_none() -> None:
    assert least_cost(np.ones(1), np.zeros(1), np.ones(1), [Row(columns=[0], least=2)]) is None
