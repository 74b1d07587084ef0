"""The first start: a service without keys makes the shop's own, so that a person can begin."""

from dataclasses import dataclass
from datetime import datetime

from sqlalchemy import select

from service.access.browsers import make_link
from service.access.keys import KeyAsked, make_key
from service.access.owners import hold_access, the_shop
from service.access.scopes import Scope
from service.store.store import Store
from service.store.tables import Key

FIRST_KEY_TITLE = "made at the first start"


@dataclass(frozen=True, slots=True, kw_only=True)
class FirstKey:
    """The first key, told once.

    Attributes:
        key_id: Of the key.
        secret: What requests are made with.
        sign_in_path: The path of a link that signs one browser in, once, within a quarter of an hour.
    """

    key_id: str
    secret: str
    sign_in_path: str


def first_start(store: Store, now: datetime) -> FirstKey | None:
    """Make the shop's own key, with every scope, where no key was ever made.

    Of several processes that start at a time, one makes it. Where all keys are revoked none is made: somebody
    wanted the service shut, and `discwright keys add` opens it again.

    Args:
        store: The database.
        now: The moment.

    Returns:
        None where keys exist, or existed.

    Raises:
        StoreBusyError: The database does not answer.
    """
    with store.reading() as session:  # every later start is no more than this look
        if session.scalars(select(Key.id).limit(1)).first() is not None:
            return None
    with store.writing() as session:
        hold_access(session)
        if session.scalars(select(Key.id).limit(1)).first() is not None:
            return None
        asked = KeyAsked(title=FIRST_KEY_TITLE, scopes=frozenset(Scope))
        made = make_key(session, the_shop(session, now), asked, now)
        link = make_link(session, made.told.id, now)
        return FirstKey(key_id=made.told.id, secret=made.secret, sign_in_path=f"/sign-in/{link}")
