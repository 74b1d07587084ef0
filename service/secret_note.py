"""Whether all machines sign with the same secret: a number made of it is noted in the database they share.

From the number the secret cannot be found; two secrets give the same one by a chance of one in 2^60.
"""

import hashlib
from enum import StrEnum

from service.parts import Parts
from service.store.inserting import insert_into
from service.store.tables import Counter

NAME = "secret"
BITS = 60  # of the number, so that it fits a column of 64 with its sign


class SecretNote(StrEnum):
    """What was found."""

    NOTED = "noted"  # there was no note, and now there is
    SAME = "same"
    ANOTHER = "another"


def compare_secret(parts: Parts, *, note_anew: bool) -> SecretNote:
    """Hold this machine's secret against the note; the first to look makes it.

    Args:
        parts: Whose secret.
        note_anew: Whether this machine's secret is right, whatever is noted.

    Raises:
        StoreError: The database cannot be used.
    """
    digest = hashlib.sha256(parts.secret_for("the note of the secret")).digest()
    number = int.from_bytes(digest[:8], "big") >> (64 - BITS)
    with parts.store.writing() as session:
        noted = session.get(Counter, NAME)
        if noted is not None and noted.value == number:
            return SecretNote.SAME
        if noted is not None and not note_anew:
            return SecretNote.ANOTHER
        new = insert_into(session, Counter).values(name=NAME, value=number)
        session.execute(new.on_conflict_do_update(index_elements=["name"], set_={"value": number}))
    return SecretNote.NOTED
