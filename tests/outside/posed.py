"""A tune's problems as the arrange stage poses them, one for every transposition, for second opinions and timings."""

from dataclasses import dataclass

from layout.arrange.asking import Asked, asked_of_discs
from layout.arrange.comb import comb_of
from layout.arrange.moments import speed_factors
from layout.arrange.posing import Rules, pose, rules_of
from layout.arrange.problem import Problem
from layout.arrange.rulings import read_rulings
from layout.arrange.spreading import with_spread_chords
from layout.documents import Cutter, Movement, Settings
from layout.mechanics.projection import pattern_of
from layout.mechanics.spacing import Spacing, spacing_of
from layout.mechanics.turning import turning_of
from layout.read import Score


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Posed:
    """One tune on one comb at one speed, before transposition."""

    asked: Asked
    rules: Rules

    def problem(self, semitones: int) -> Problem:
        return with_spread_chords(pose(self.asked.wanted, semitones, self.rules))


def spacing_on(movement: Movement, cutter: Cutter) -> Spacing:
    return spacing_of(movement, turning_of(movement), pattern_of(movement, cutter), cutter.min_web_mm)


def posed(score: Score, movement: Movement, settings: Settings, spacing: Spacing) -> Posed:
    """What one disc is asked to play at the one speed that the settings give."""
    comb, turning = comb_of(movement), turning_of(movement)
    rulings = read_rulings(settings.rulings, score, comb)
    [factor] = speed_factors(score, settings, rulings.left_out, turning.free_turn_s)
    [asked] = asked_of_discs(score, settings, rulings, turning.free_turn_s, factor)
    return Posed(asked=asked, rules=rules_of(movement, comb, turning, spacing, settings))
