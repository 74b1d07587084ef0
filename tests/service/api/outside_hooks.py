"""What schemathesis cannot know of this API: how a tune or a form is put into bytes."""

import schemathesis
from hypothesis import strategies as st

from service.api.operations.common import SMALL_TUNE

BYTES = ("audio/midi", "audio/x-midi", "audio/mid", "application/x-midi", "application/octet-stream")

for media_type in BYTES:
    schemathesis.openapi.media_type(media_type, st.just(SMALL_TUNE) | st.binary(max_size=200))


@schemathesis.serializer(*BYTES)
def send_bytes(ctx: object, value: object) -> bytes:
    """Bytes as they are."""
    return value if isinstance(value, bytes) else str(value).encode()
