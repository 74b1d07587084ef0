"""Operations: runs. Written by generate.py from the API document; not to be changed by hand."""

from collections.abc import Mapping
from typing import Any, cast

from service.client import shapes
from service.client.calling import Answer, Form, Group, Query, once, place


class OfRuns(Group):
    """Operations: runs."""

    def begin_run(self, parts: Mapping[str, bytes | Mapping[str, Any]]) -> shapes.RunAnswer:
        """Order many discs at once."""
        path = "/v1/runs"
        return cast("shapes.RunAnswer", self._caller.json("POST", path, body=Form(parts), headers=once()))

    def list_runs(self, query: Query | None = None) -> shapes.RunsAnswer:
        """Runs, the newest first."""
        path = "/v1/runs"
        return cast("shapes.RunsAnswer", self._caller.json("GET", path, query=query))

    def tell_run(self, run_id: str) -> shapes.RunAnswer:
        """A run, and how many of its pairs are in which state."""
        path = place("/v1/runs/{run_id}", {"run_id": run_id})
        return cast("shapes.RunAnswer", self._caller.json("GET", path))

    def list_run_items(self, run_id: str, query: Query | None = None) -> shapes.ItemsAnswer:
        """The pairs of a run, and what became of each."""
        path = place("/v1/runs/{run_id}/items", {"run_id": run_id})
        return cast("shapes.ItemsAnswer", self._caller.json("GET", path, query=query))

    def tell_run_results(self, run_id: str) -> Answer:
        """The files of a run in one archive."""
        path = place("/v1/runs/{run_id}/results.zip", {"run_id": run_id})
        return self._caller.send("GET", path)
