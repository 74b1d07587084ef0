"""How long planning took, stage by stage, over all workers: counted in the database, where every scrape finds it.

Workers serve no requests, and come and go; what they counted must outlive them. The counts are numbers of the table
of counters, changed by adding alone.
"""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from itertools import accumulate

from sqlalchemy import select
from sqlalchemy.orm import Session

from service.store.inserting import insert_into
from service.store.store import Store
from service.store.tables import Counter

AT_MOST_S = (0.05, 0.1, 0.25, 0.5, 1.0, 2.5, 5.0, 10.0, 30.0, 60.0, 300.0)  # s; longest of each class
BEYOND = "beyond"
TOTAL = "total_us"
PREFIX = "planning"
US_PER_S = 1_000_000


@dataclass(frozen=True, slots=True, kw_only=True)
class StageTimes:
    """How often a stage took how long.

    Attributes:
        stage: Its name.
        counts: How often it took at most so many seconds and more than the class before, for each of `AT_MOST_S`, and
            at last how often it took longer.
        total_s: Seconds of all times together.
    """

    stage: str
    counts: tuple[int, ...]
    total_s: float

    def cumulated(self) -> Iterator[tuple[float | None, int]]:
        """For each of `AT_MOST_S`, and None for any time: how often it took no longer."""
        yield from zip((*AT_MOST_S, None), accumulate(self.counts), strict=True)


def note_stage_times(store: Store, took_s: Mapping[str, float]) -> None:
    """Count one planning.

    Args:
        store: The database.
        took_s: Seconds of each stage, by its name of at most twenty letters.

    Raises:
        StoreError: It could not be written.
    """
    added: dict[str, int] = {}
    for stage, seconds in took_s.items():
        added[_name(stage, _class_of(seconds))] = 1
        added[_name(stage, TOTAL)] = round(seconds * US_PER_S)
    # In one order, so that two workers cannot lock each other.
    rows = [{"name": name, "value": value} for name, value in sorted(added.items())]
    if rows:
        with store.writing() as session:
            new = insert_into(session, Counter)
            more = {"value": Counter.value + new.excluded.value}
            session.execute(new.on_conflict_do_update(index_elements=["name"], set_=more), rows)


def stage_times(session: Session) -> tuple[StageTimes, ...]:
    """What was counted, by the name of the stage."""
    counted: dict[str, dict[str, int]] = {}
    found = select(Counter.name, Counter.value).where(Counter.name.startswith(f"{PREFIX}:"))
    for name, value in session.execute(found):
        _, stage, part = name.split(":")
        counted.setdefault(stage, {})[part] = value
    classes = (*(f"{at_most_s:g}" for at_most_s in AT_MOST_S), BEYOND)
    return tuple(
        StageTimes(
            stage=stage,
            counts=tuple(parts.get(one, 0) for one in classes),
            total_s=parts.get(TOTAL, 0) / US_PER_S,
        )
        for stage, parts in sorted(counted.items())
    )


def _class_of(seconds: float) -> str:
    return next((f"{at_most_s:g}" for at_most_s in AT_MOST_S if seconds <= at_most_s), BEYOND)


def _name(stage: str, part: str) -> str:
    return f"{PREFIX}:{stage}:{part}"
