from layout.arrange.budget import MOST_LOOKS_FOR_RULINGS, MOST_NODES_FOR_RULINGS, MOST_S_FOR_RULINGS, Budget


def test_the_time_left_is_the_limit_less_what_the_clock_went_on_and_never_below_nothing() -> None:
    times_s = iter([100.0, 102.0, 104.9, 105.0, 205.0])
    budget = Budget(time_limit_s=5, clock=lambda: next(times_s))

    assert budget.seconds_left() == 3.0  # 105 - 102
    assert budget.stopped is None
    assert budget.stopped == "time"
    assert budget.seconds_left() == 0.0


def test_rulings_have_their_own_nodes_looks_and_seconds_after_the_time_limit() -> None:
    times_s = iter([100.0, 103.0, 103.0, 103.0])
    budget = Budget(nodes=0, looks=0, time_limit_s=5, clock=lambda: next(times_s))

    rulings = budget.for_rulings

    # 2 s are left of the search; those of the rulings come after.
    assert rulings.seconds_left() == 2.0 + MOST_S_FOR_RULINGS
    assert (rulings.nodes_left, rulings.looks_left) == (MOST_NODES_FOR_RULINGS, MOST_LOOKS_FOR_RULINGS)
    assert budget.for_rulings is rulings


def test_rulings_have_no_time_limit_where_the_search_has_none() -> None:
    assert Budget().for_rulings.seconds_left() is None
    assert Budget(time_limit_s=5).for_rulings.seconds_left() is None  # no clock


def test_nodes_states_and_looks_each_end_a_search() -> None:
    nodes, states, looks = Budget(nodes=3), Budget(states=3), Budget(looks=3)

    nodes.spend(3)
    states.spend_states(4)
    looks.spend_looks(5)

    assert [one.stopped for one in (nodes, states, looks)] == ["nodes"] * 3
    assert (nodes.nodes_left, nodes.nodes_spent) == (0, 3)
    assert states.states_left == 0
