import base64
from datetime import UTC, datetime, timedelta

import pytest
from hypothesis import given
from hypothesis import strategies as st
from standardwebhooks import Webhook, WebhookVerificationError

from service.hooks.signing import (
    SignatureError,
    first_secrets,
    new_secret,
    rotated,
    signed_headers,
    valid_secrets,
    verify,
)
from service.limits import HOOK_LIMITS

NOW = datetime(2025, 12, 2, 10, 0, 0, 250_000, tzinfo=UTC)
DAY = timedelta(days=1)
# The vector that the reference libraries of Standard Webhooks test with.
VECTOR_SECRET = "whsec_MfKQ9r8GKYqrTwjUPD8ILPZIo2LaLaSw"
VECTOR_ID = "msg_p5jXN8AQM9LWM0D4loKWxJek"
VECTOR_AT = datetime.fromtimestamp(1614265330, UTC)
VECTOR_BODY = b'{"test": 2432232314}'
VECTOR_SIGNATURE = "v1,g0hM9SsE+OTPJTGt/tmIKtSyZlE3uFJELVlNIOLJ1OE="


def test_the_published_vector_is_signed_as_published() -> None:
    headers = signed_headers(VECTOR_ID, VECTOR_BODY, at=VECTOR_AT, valid_secrets=[VECTOR_SECRET])

    assert headers == {
        "webhook-id": VECTOR_ID,
        "webhook-timestamp": "1614265330",
        "webhook-signature": VECTOR_SIGNATURE,
    }


def test_a_secret_is_whsec_and_32_random_bytes() -> None:
    one, other = new_secret(), new_secret()

    assert one.startswith("whsec_")
    assert len(base64.b64decode(one.removeprefix("whsec_"), validate=True)) == 32
    assert one != other


@given(text=st.text(max_size=300))
def test_the_reference_library_takes_every_message_we_sign(text: str) -> None:
    secret, now, body = new_secret(), datetime.now(UTC), text.encode()

    headers = signed_headers("msg_1", body, at=now, valid_secrets=[secret])

    Webhook(secret).verify(body, headers, json_parse=False)


def test_while_a_rotated_secret_is_valid_both_take_the_message() -> None:
    now = datetime.now(UTC)
    old = first_secrets()
    new = rotated(old, now=now, old_valid_until=now + DAY)

    headers = signed_headers("msg_1", b"{}", at=now, valid_secrets=valid_secrets(new, now=now))

    assert len(headers["webhook-signature"].split(" ")) == 2
    Webhook(old["current"]).verify(b"{}", headers)
    Webhook(new["current"]).verify(b"{}", headers)


def test_a_rotated_secret_signs_no_longer_than_it_is_valid() -> None:
    now = datetime.now(UTC)
    old = first_secrets()
    new = rotated(old, now=now - DAY, old_valid_until=now)

    headers = signed_headers("msg_1", b"{}", at=now, valid_secrets=valid_secrets(new, now=now))

    with pytest.raises(WebhookVerificationError):
        Webhook(old["current"]).verify(b"{}", headers)


def test_rotating_twice_leaves_the_first_secret_its_time() -> None:
    first = first_secrets()
    second = rotated(first, now=NOW, old_valid_until=NOW + DAY)
    third = rotated(second, now=NOW, old_valid_until=NOW + DAY)

    assert valid_secrets(third, now=NOW) == (third["current"], second["current"], first["current"])


def test_a_few_old_secrets_sign_and_no_more() -> None:
    kept = first_secrets()

    for _ in range(10):
        kept = rotated(kept, now=NOW, old_valid_until=NOW + DAY)

    assert len(valid_secrets(kept, now=NOW)) == 1 + HOOK_LIMITS.secrets_before


def test_a_message_of_the_reference_library_is_verified() -> None:
    secret = new_secret()
    signature = Webhook(secret).sign("msg_1", NOW, '{"type":"hook.test"}')
    headers = {
        "webhook-id": "msg_1",
        "webhook-timestamp": str(int(NOW.timestamp())),
        "webhook-signature": f"v1a,bm90aGluZw== v1,bm90aGluZw== {signature}",
    }

    verify(headers, b'{"type":"hook.test"}', secret=secret, now=NOW)


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"webhook-id": ""}, "the message has no webhook-id"),
        ({"webhook-id": "msg_2"}, "no signature of the message fits the secret"),
        ({"webhook-timestamp": "now"}, "the webhook-timestamp is 'now', not seconds since 1970"),
        ({"webhook-signature": VECTOR_SIGNATURE}, "no signature of the message fits the secret"),
        ({"webhook-signature": "v2,x"}, "no signature of the message fits the secret"),
    ],
)
def test_a_message_that_is_not_as_it_was_signed_is_refused(change: dict[str, str], message: str) -> None:
    secret = new_secret()
    headers = signed_headers("msg_1", b"{}", at=NOW, valid_secrets=[secret])

    with pytest.raises(SignatureError, match=f"^{message}$"):
        verify({**headers, **change}, b"{}", secret=secret, now=NOW)


@pytest.mark.parametrize("minutes", [-6, 6])
def test_a_message_of_another_time_is_refused(minutes: int) -> None:
    secret = new_secret()
    headers = signed_headers("msg_1", b"{}", at=NOW, valid_secrets=[secret])

    with pytest.raises(SignatureError, match=r"is 360 s from now; at most 300 s are taken"):
        verify(headers, b"{}", secret=secret, now=NOW + timedelta(minutes=minutes))


def test_a_body_changed_by_one_letter_is_refused() -> None:
    secret = new_secret()
    headers = signed_headers("msg_1", b'{"a":1}', at=NOW, valid_secrets=[secret])

    with pytest.raises(SignatureError):
        verify(headers, b'{"a":2}', secret=secret, now=NOW)


def test_a_secret_that_is_none_of_ours_is_told_as_such() -> None:
    headers = signed_headers("msg_1", b"{}", at=NOW, valid_secrets=[new_secret()])

    with pytest.raises(SignatureError, match=r"^the secret is not whsec_ and base64$"):
        verify(headers, b"{}", secret="whsec_no/base64!", now=NOW)
