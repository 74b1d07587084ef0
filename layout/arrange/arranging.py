"""The arrange stage: Score to Arrangement, of one disc or of several."""

from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass

from layout.arrange.arrangement import Arrangement, LeftOutReason
from layout.arrange.asking import Asked, asked_of_discs
from layout.arrange.budget import Budget
from layout.arrange.comb import Comb, comb_of
from layout.arrange.finishing import Finishing
from layout.arrange.moments import speed_factors
from layout.arrange.posing import Rules, most_kept, pose, rules_of
from layout.arrange.problem import Problem
from layout.arrange.refusals import Refused, refusal, undecided
from layout.arrange.rulings import Rulings, check_in_time, read_rulings
from layout.arrange.searching import NoWay, Way, search
from layout.arrange.splitting import fitting_factor
from layout.documents.movement import Movement
from layout.documents.settings import Settings
from layout.errors import RulingError
from layout.mechanics.spacing import Spacing
from layout.mechanics.turning import Turning, turning_of
from layout.read.score import Score

Clock = Callable[[], float]


def arrange(
    score: Score, movement: Movement, settings: Settings, spacing: Spacing, clock: Clock | None = None
) -> Arrangement:
    """Which notes one disc plucks on which tracks, when, and why the others are not.

    It is the best arrangement there is, by `Worth`, over the transpositions and speeds the settings
    let it search, with its proof; or the best found, where the search was stopped. Every pluck keeps
    `spacing`, the end of the turn and its start included. A tune with no notes, or none the comb can
    play, gives an arrangement without plucks and every note in `left_out`.

    Args:
        score: The tune.
        movement: What the disc is for.
        settings: What the maker asks for; `discs` is taken for one.
        spacing: The rules of nearness, from layout.mechanics.spacing for this movement and a cutter.
        clock: Seconds of a clock that only goes forward, for `time_limit_s`; without it there is no such limit.

    Raises:
        DocumentError: The passage of the settings cannot be.
        RulingError: The settings' rulings contradict each other, the tune, the passage or the comb.
    """
    [arrangement] = arrange_discs(score, movement, settings.model_copy(update={"discs": 1}), spacing, clock)
    return arrangement


def arrange_discs(
    score: Score,
    movement: Movement,
    settings: Settings,
    spacing: Spacing,
    clock: Clock | None = None,
    most_s: float | None = None,
) -> tuple[Arrangement, ...]:
    """The same for as many discs as the settings say, in the tune's order, at one transposition and speed.

    The notes of the other discs are outside a disc's passage. Each disc's bound is what it keeps and
    all that could be won on all discs together.

    Args:
        score: As for `arrange`.
        movement: As for `arrange`.
        settings: What the maker asks for.
        spacing: As for `arrange`.
        clock: As for `arrange`.
        most_s: Seconds by the clock that the search may take where the settings allow more; None for no such limit.

    Raises:
        DocumentError: The passage of the settings cannot be.
        RulingError: The settings' rulings contradict each other, the tune, the passage or the comb.
    """
    limits_s = [limit_s for limit_s in (settings.time_limit_s, most_s) if limit_s is not None]
    budget = Budget(time_limit_s=min(limits_s, default=None), clock=clock)
    comb, turning = comb_of(movement), turning_of(movement)
    tune = _Tune(score=score, settings=settings, turning=turning, rulings=read_rulings(settings.rulings, score, comb))
    rules = rules_of(movement, comb, turning, spacing, settings)
    asked = _asked_by_speed(tune)
    ways = {way: _most(asked[way.speed_factor], way, rules) for way in _ways(settings, asked)}
    found = search(ways, lambda way: _posed(asked[way.speed_factor], way, rules), budget)
    if isinstance(found, NoWay):
        raise _refusal(found, asked, tune, comb, spacing)
    finishing = Finishing(score=score, movement=movement, turning=turning, spacing=spacing, comb=comb, found=found)
    discs = zip(asked[found.way.speed_factor], found.problems, found.solved, strict=True)
    return tuple(finishing.arrangement(one, problem, solved) for one, problem, solved in discs)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Tune:
    score: Score
    settings: Settings
    turning: Turning
    rulings: Rulings


def _asked_by_speed(tune: _Tune) -> dict[float, tuple[Asked, ...]]:
    """What is asked for at every speed searched at which the rulings can be followed in time.

    Raises:
        RulingError: At no speed they can; told of the speed nearest to as written.
    """
    found: dict[float, tuple[Asked, ...]] = {}
    errors: list[RulingError] = []
    for factor in sorted(_factors(tune), key=lambda factor: abs(factor - 1)):
        asked = asked_of_discs(tune.score, tune.settings, tune.rulings, tune.turning.free_turn_s, factor)
        try:
            check_in_time(tune.rulings, _out_of_all(asked))
        except RulingError as error:
            errors.append(error)
        else:
            found[factor] = asked
    if not found:
        raise errors[0]
    late = {factor: sum(_late_count(one) for one in asked) for factor, asked in found.items()}
    # A tune that goes past the turn gives no disc to cut: of speeds to choose from those come first that hold it.
    return {factor: asked for factor, asked in found.items() if late[factor] == min(late.values())}


def _late_count(asked: Asked) -> int:
    return sum(reason == "past-the-turn" for reason in asked.moments.out.values())


def _factors(tune: _Tune) -> tuple[float, ...]:
    free_turn_s, ruled_out = tune.turning.free_turn_s, tune.rulings.left_out
    if tune.settings.discs > 1 and tune.settings.speed.mode == "fit":
        return (fitting_factor(tune.score, tune.settings, ruled_out, free_turn_s),)
    return speed_factors(tune.score, tune.settings, ruled_out, free_turn_s)


def _out_of_all(asked: Sequence[Asked]) -> dict[int, LeftOutReason]:
    """The notes that no disc is asked for, and why: the reason of the disc that comes nearest to it."""
    out: dict[int, LeftOutReason] = dict(asked[0].moments.out)
    for one in asked[1:]:
        there = one.moments.out
        out = {
            note: reason if there[note] == "outside-passage" else there[note]
            for note, reason in out.items()
            if note in there
        }
    return out


def _ways(settings: Settings, factors: Iterable[float]) -> list[Way]:
    transpose = settings.transpose
    if transpose.semitones is not None:
        searched = [transpose.semitones]
    else:
        searched = list(range(-transpose.range, transpose.range + 1))
    return [Way(semitones=semitones, speed_factor=factor) for factor in factors for semitones in searched]


def _posed(asked: Sequence[Asked], way: Way, rules: Rules) -> list[Problem]:
    return [pose(one.wanted, way.semitones, rules) for one in asked]


def _most(asked: Sequence[Asked], way: Way, rules: Rules) -> int:
    """What no arrangement on a way is worth more than, found in no time: all that the comb has."""
    return sum(most_kept(one.wanted, way.semitones, rules) for one in asked)


def _refusal(
    found: NoWay, asked: Mapping[float, tuple[Asked, ...]], tune: _Tune, comb: Comb, spacing: Spacing
) -> RulingError:
    if found.not_known:
        return undecided(len(tune.rulings.forced), found.not_known, len(found.shown_by))
    way = min(found.shown_by, key=lambda way: (abs(way.speed_factor - 1), abs(way.semitones), way.semitones))
    disc, problem, impossible = found.shown_by[way]
    refused = Refused(
        semitones=way.semitones,
        wanted=asked[way.speed_factor][disc].wanted,
        problem=problem,
        impossible=impossible,
    )
    return refusal(refused, tune.rulings, comb, spacing, tune.settings.transpose)
