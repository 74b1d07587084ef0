"""Claims of an Idempotency-Key: held while their request works, free again soon after its process was killed."""

import threading
import time
from collections.abc import Iterator
from contextlib import AbstractContextManager
from dataclasses import replace

import pytest
from sqlalchemy.orm import Session

from service.orders import kept_answers
from service.orders.kept_answers import AskedOnce, Claim, StillRunningError, claim_or_answer, keep_answer, renewed
from service.parts import Parts
from service.store.faults import StoreBusyError
from tests.service.shop import WEB_SHOP, open_shop

CLAIMED_S = 0.6
ASKED = AskedOnce(owner_id=WEB_SHOP.owner_id, operation="POST /v1/orders", key="a-1", digest="0" * 64)


@pytest.fixture
def shop(any_parts: Parts, monkeypatch: pytest.MonkeyPatch) -> Iterator[Parts]:
    open_shop(any_parts)
    monkeypatch.setattr(kept_answers, "CLAIMED_S", CLAIMED_S)
    yield any_parts
    for thread in threading.enumerate():
        if thread.name == kept_answers.RENEWING:
            thread.join()  # it may be at the database, which is closed next


def claimed(shop: Parts) -> Claim:
    claim = claim_or_answer(shop.store, ASKED, kept_days=30)
    assert isinstance(claim, Claim)
    return claim


def test_a_claim_whose_request_ended_without_a_word_is_free_when_it_has_run_out(shop: Parts) -> None:
    first = claimed(shop)
    with pytest.raises(StillRunningError):
        claim_or_answer(shop.store, ASKED, kept_days=30)

    time.sleep(CLAIMED_S)

    assert claimed(shop).token != first.token


def test_a_claim_is_held_while_its_request_works_however_long_that_takes(shop: Parts) -> None:
    claim = claimed(shop)

    with renewed(shop.store, claim):
        time.sleep(2 * CLAIMED_S)
        with pytest.raises(StillRunningError):
            claim_or_answer(shop.store, ASKED, kept_days=30)


def test_a_claim_that_was_taken_over_writes_no_answer_and_renews_nothing(shop: Parts) -> None:
    first = claimed(shop)
    time.sleep(CLAIMED_S)
    second = claimed(shop)
    given = kept_answers.Given(status=202, headers={}, body=b"{}")

    with renewed(shop.store, first):
        time.sleep(2 * CLAIMED_S)
    with pytest.raises(StillRunningError), shop.store.writing() as session:
        keep_answer(session, first, given)

    third = claimed(shop)  # the second's had run out: the first's renewals are not its own
    assert len({first.token, second.token, third.token}) == 3


def test_a_key_whose_answer_was_kept_as_long_as_stated_is_free_for_another_request(shop: Parts) -> None:
    claim_or_answer(shop.store, ASKED, kept_days=0)

    another = claim_or_answer(shop.store, replace(ASKED, digest="1" * 64), kept_days=30)

    assert isinstance(another, Claim)


def test_a_claim_is_renewed_again_after_the_database_did_not_answer(
    shop: Parts, monkeypatch: pytest.MonkeyPatch, caplog: pytest.LogCaptureFixture
) -> None:
    claim = claimed(shop)
    faults = [StoreBusyError("the database does not answer")]
    writing = shop.store.writing

    def writing_later() -> AbstractContextManager[Session]:
        if faults:
            raise faults.pop()
        return writing()

    monkeypatch.setattr(shop.store, "writing", writing_later)
    with renewed(shop.store, claim):
        time.sleep(1.5 * CLAIMED_S)
        monkeypatch.undo()
        with pytest.raises(StillRunningError):
            claim_or_answer(shop.store, ASKED, kept_days=30)

    assert "the claim of an Idempotency-Key could not be renewed: the database does not answer" in caplog.messages
