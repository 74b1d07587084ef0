"""A route that checks a request by another model than it describes fails at once: the described is what checks."""

from collections.abc import Iterator

import pytest
from flask import Flask, Response, request
from pydantic import BaseModel

from service.api.describing import Body, Operation, describes
from service.api.models.hooks import SecretBody
from service.api.models.keys import KeysQuery
from service.api.models.layouts import NoQuery
from service.api.operations.common import DONE
from service.api.request_models import read_arguments, read_text


@pytest.fixture
def asked() -> Iterator[Flask]:
    """A request whose operation describes a query and a body."""
    body = Body(media_type="application/json", model=SecretBody)
    operation = Operation(id="try", tag="about", summary="A try", query=KeysQuery, bodies=(body,), answers=(DONE,))
    app = Flask("described", static_folder=None)
    app.add_url_rule("/", view_func=describes(operation)(lambda: Response(status=204)), endpoint="try")
    with app.test_request_context("/"):
        yield app


def test_what_is_described_checks(asked: Flask) -> None:
    assert read_arguments(request, KeysQuery).limit == 100
    assert read_text(request, SecretBody, b"{}", document="secret").old_valid_hours == 24


def test_another_model_is_refused(asked: Flask) -> None:
    class Other(KeysQuery):
        pass

    with pytest.raises(LookupError, match="try is not described as asking by NoQuery"):
        read_arguments(request, NoQuery)
    with pytest.raises(LookupError, match="try is not described as bringing Other"):
        read_text(request, Other, b"{}", document="other")
    assert issubclass(Other, BaseModel)
