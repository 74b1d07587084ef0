"""Operations: about. Written by generate.py from the API document; not to be changed by hand."""

from typing import cast

from service.client import shapes
from service.client.calling import Answer, Group, place


class OfAbout(Group):
    """Operations: about."""

    def tell_addresses(self) -> shapes.AboutAnswer:
        """Where things are."""
        path = "/"
        return cast("shapes.AboutAnswer", self._caller.json("GET", path))

    def tell_health(self) -> shapes.HealthAnswer:
        """Whether the service answers."""
        path = "/healthz"
        return cast("shapes.HealthAnswer", self._caller.json("GET", path))

    def tell_api_document(self) -> shapes.ApiDocument:
        """This document."""
        path = "/openapi.json"
        return cast("shapes.ApiDocument", self._caller.json("GET", path))

    def list_problem_kinds(self) -> shapes.ProblemKindsAnswer:
        """The kinds of errors."""
        path = "/problems"
        return cast("shapes.ProblemKindsAnswer", self._caller.json("GET", path))

    def tell_problem_kind(self, name: str) -> shapes.ProblemKindAnswer:
        """What a kind of error means."""
        path = place("/problems/{name}", {"name": name})
        return cast("shapes.ProblemKindAnswer", self._caller.json("GET", path))

    def tell_limits(self) -> shapes.LimitsAnswer:
        """What is taken at most."""
        path = "/v1/limits"
        return cast("shapes.LimitsAnswer", self._caller.json("GET", path))

    def list_schemas(self) -> shapes.SchemasAnswer:
        """The documents there are schemas of."""
        path = "/v1/schemas"
        return cast("shapes.SchemasAnswer", self._caller.json("GET", path))

    def tell_schema(self, name: str) -> Answer:
        """The JSON Schema of a document."""
        path = place("/v1/schemas/{name}", {"name": name})
        return self._caller.send("GET", path)
