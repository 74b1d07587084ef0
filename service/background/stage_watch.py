"""How long the stages of planning one order take: watched from outside, so that no stage knows of a clock."""

import time
from collections.abc import Iterator, Sequence
from contextlib import contextmanager

from service.planner import AnyPlanner, PlannerAround
from service.store.holds import FileKeeper


class StageWatch:
    """Adds up the seconds of each stage."""

    def __init__(self) -> None:
        """Begin with none."""
        self.took_s: dict[str, float] = {}

    @contextmanager
    def timing(self, stage: str) -> Iterator[None]:
        """Add what is done inside to a stage; nothing where it fails."""
        begun_s = time.perf_counter()
        yield
        self.took_s[stage] = self.took_s.get(stage, 0.0) + time.perf_counter() - begun_s


class TimedPlanner(PlannerAround):
    """A planner that is watched: `laying-out` is from the tune to checked discs, `files` from these to their bytes."""

    def __init__(self, planner: AnyPlanner, watch: StageWatch) -> None:
        super().__init__(planner, lambda part: watch.timing("laying-out" if part == "laying-out" else "files"))


class TimedKeeper(FileKeeper):
    """A keeper that is watched: `keeping` is until the files are in the store."""

    def __init__(self, keeper: FileKeeper, watch: StageWatch) -> None:
        self._keeper = keeper
        self._watch = watch

    def keep(self, contents: Sequence[bytes]) -> list[str]:
        """As the keeper does."""
        with self._watch.timing("keeping"):
            return self._keeper.keep(contents)

    def read(self, digest: str) -> bytes:
        """As the keeper does."""
        return self._keeper.read(digest)
