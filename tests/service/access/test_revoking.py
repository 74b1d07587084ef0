"""Revoked keys and stopped hooks are noted where no restore forgets them, whoever ends them."""

from datetime import UTC, datetime
from http import HTTPStatus

import pytest
from flask.testing import FlaskClient

from service.access.keys import key_of_id
from service.access.revoking import revoke_for_good
from service.access.scopes import Scope
from service.api.hooks import hook_routes
from service.commands.main import main
from service.hooks.telling import deliver_due
from service.parts import Parts
from service.store.faults import StoreBusyError
from service.store.files import FileStore
from tests.service.api.guarded import NOW, bearing, guarded_app, new_key
from tests.service.hooks.receivers import Receiver, listening
from tests.service.hooks.rows import make_hook, place, reaching_loopback


def http_of(parts: Parts) -> FlaskClient:
    app = guarded_app(parts)
    app.register_blueprint(hook_routes(parts))
    return app.test_client()


def test_a_key_revoked_over_http_is_noted(any_parts: Parts) -> None:
    admin, gone = new_key(any_parts, *Scope), new_key(any_parts, Scope.READ)

    answer = http_of(any_parts).delete(f"/v1/keys/{gone.told.id}", headers=bearing(admin))

    assert answer.status_code == HTTPStatus.NO_CONTENT
    assert list(any_parts.files.noted()) == [gone.told.id]


def test_a_key_revoked_by_the_command_is_noted(any_parts: Parts, monkeypatch: pytest.MonkeyPatch) -> None:
    gone = new_key(any_parts, Scope.READ)
    monkeypatch.setenv("DISCWRIGHT_DATA", str(any_parts.settings.places.data_directory))
    if any_parts.settings.places.database_url is not None:
        monkeypatch.setenv("DATABASE_URL", any_parts.settings.places.database_url)

    assert main(["keys", "revoke", gone.told.id]) == 0

    assert list(any_parts.files.noted()) == [gone.told.id]


def test_a_key_that_is_another_owners_is_neither_revoked_nor_noted(any_parts: Parts) -> None:
    gone = new_key(any_parts, Scope.READ, owner="Bellgrove")

    assert revoke_for_good(any_parts.store, any_parts.files, gone.told.id, NOW, owner_id="owner_of_none") is None

    assert list(any_parts.files.noted()) == []


def test_a_key_is_revoked_though_it_cannot_be_noted_and_asking_again_notes_it(
    any_parts: Parts, monkeypatch: pytest.MonkeyPatch
) -> None:
    gone = new_key(any_parts, Scope.READ)

    def away(_files: FileStore, _what: str) -> None:
        raise StoreBusyError("the store of files does not answer")

    with monkeypatch.context() as meanwhile:
        meanwhile.setattr(FileStore, "note", away)
        with pytest.raises(StoreBusyError):
            revoke_for_good(any_parts.store, any_parts.files, gone.told.id, NOW)
    key = key_of_id(any_parts.store, gone.told.id)
    assert key is not None
    assert key.revoked_at == NOW

    assert revoke_for_good(any_parts.store, any_parts.files, gone.told.id, NOW) == key
    assert list(any_parts.files.noted()) == [gone.told.id]


def test_a_hook_deleted_over_http_is_noted(any_parts: Parts) -> None:
    http, key = http_of(any_parts), bearing(new_key(any_parts, *Scope))
    hook_id = http.post("/v1/hooks", json={"url": "https://shop.example/"}, headers=key).json["id"]  # type: ignore[index]

    assert http.delete(f"/v1/hooks/{hook_id}", headers=key).status_code == HTTPStatus.NO_CONTENT

    assert list(any_parts.files.noted()) == [hook_id]


def test_a_hook_that_answers_410_is_noted_as_off_until_it_is_turned_on_again(any_parts: Parts) -> None:
    key = new_key(any_parts, *Scope)
    shop = key.told.owner.id
    with listening(Receiver(answer=lambda _got: (HTTPStatus.GONE, {}))) as receiver:
        hook_id = make_hook(any_parts, shop, receiver.url).hook.id
        place(any_parts, shop)
        deliver_due(reaching_loopback(any_parts), datetime.now(UTC))
    assert list(any_parts.files.noted()) == [f"off_{hook_id}"]

    answer = http_of(any_parts).post(f"/v1/hooks/{hook_id}/enable", headers=bearing(key))

    assert answer.json["disabled_at"] is None  # type: ignore[index]
    assert list(any_parts.files.noted()) == []
