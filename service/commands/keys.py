"""`discwright keys`: the keys of the service, made, listed and revoked on its own machine."""

import argparse
import os
from collections.abc import Iterator
from contextlib import contextmanager
from datetime import datetime, timedelta

from service.access.first_start import FirstKey
from service.access.keys import KeyAsked, KeyTold, list_keys, make_key
from service.access.owners import TitleError, checked_title, hold_access, owner_titled, the_shop
from service.access.revoking import revoke_for_good
from service.access.scopes import MEANINGS, Scope, ScopeError, scopes_of
from service.access.telling import key_told
from service.commands.arguments import OneLineParser, Tools, add_json
from service.commands.errors import GOOD, CommandError
from service.commands.output import aligned, say, say_json
from service.moments import utc_now
from service.parts import Parts, open_parts
from service.settings import SettingsError, settings_from
from service.store.faults import StoreError

ABOUT = "Make, list and revoke the keys with which programs ask the service."
EXAMPLE = f"""example:
  discwright keys add 'web shop' --owner Bellgrove --scopes read,order
  discwright keys list
  discwright keys revoke KEY_ID

Scopes are:
{chr(10).join(f"  {scope:<10}{meaning}" for scope, meaning in MEANINGS.items())}"""
EVERY_SCOPE = "all"
HEADINGS = ("ID", "OWNER", "TITLE", "SCOPES", "LAST USED", "STATE")


def add_arguments(parser: OneLineParser) -> None:
    """Add the arguments of this subcommand: it has subcommands of its own."""
    actions = parser.add_subparsers(title="actions", metavar="ACTION", required=True, parser_class=OneLineParser)
    add = actions.add_parser("add", help="make a key and print its secret, this once", allow_abbrev=False)
    add.add_argument("title", type=_title, metavar="TITLE", help="what the key is called, such as where it is used")
    add.add_argument(
        "--scopes",
        type=_scopes,
        required=True,
        metavar="SCOPES",
        help=f"what it may do: of {', '.join(Scope)}, with commas between, or {EVERY_SCOPE}",
    )
    add.add_argument(
        "--owner",
        type=_title,
        metavar="OWNER",
        help="whose orders it is for, by title; a title that is new makes an owner (default: the shop itself, whose "
        "keys see the orders of all)",
    )
    add.add_argument("--test", action="store_true", help="a key for tests: its orders never reach the shop")
    add.set_defaults(act=_add)
    listing = actions.add_parser("list", help="list the keys, revoked ones too", allow_abbrev=False)
    listing.add_argument("--owner", type=_title, metavar="OWNER", help="only those of this owner, by title")
    listing.set_defaults(act=_list)
    revoke = actions.add_parser("revoke", help="make a key open nothing any more", allow_abbrev=False)
    revoke.add_argument("key", metavar="KEY_ID", help="an id that `discwright keys list` shows")
    revoke.set_defaults(act=_revoke)
    for action in (add, listing, revoke):
        add_json(action)


def run(asked: argparse.Namespace, _: Tools) -> int:
    """Do what is asked; gives the exit code.

    Raises:
        CommandError: There is no such key or owner, or the database cannot be used.
    """
    with _opened() as parts:
        code: int = asked.act(asked, parts, utc_now())
    return code


def first_key_lines(first: FirstKey, address: str) -> list[str]:
    """What the first start tells a person, this once.

    Args:
        first: The key just made.
        address: How the service is reached, such as http://127.0.0.1:8000.
    """
    return [
        "this service had no keys; the shop's own was made, which may do everything:",
        f"  {first.secret}",
        "it is shown this once and kept nowhere; programs send it as  Authorization: Bearer KEY",
        "to sign a browser in, open within 15 minutes, once:",
        f"  {address}{first.sign_in_path}",
    ]


def _add(asked: argparse.Namespace, parts: Parts, now: datetime) -> int:
    wanted = KeyAsked(title=asked.title, scopes=asked.scopes, is_test=asked.test)
    with parts.store.writing() as session:
        hold_access(session)
        owner = the_shop(session, now) if asked.owner is None else owner_titled(session, asked.owner, now)
        made = make_key(session, owner, wanted, now)
    if asked.json:
        say_json({**key_told(made.told), "secret": made.secret})
        return GOOD
    kind = "key for tests" if asked.test else "key"
    say(
        [
            f"{made.told.id}: a {kind} of {owner.title}, scopes {', '.join(made.told.scopes)}",
            f"  {made.secret}",
            "it is shown this once and kept nowhere; programs send it as  Authorization: Bearer KEY",
        ]
    )
    return GOOD


def _list(asked: argparse.Namespace, parts: Parts, now: datetime) -> int:
    keys = [key for key in list_keys(parts.store) if asked.owner in (None, key.owner.title)]
    if asked.json:
        say_json([key_told(key) for key in keys])
    elif keys:
        say(aligned([HEADINGS, *(_row(key, now) for key in keys)]))
    else:
        whose = "no keys yet" if asked.owner is None else f"no keys of an owner called {asked.owner!r}"
        say([f"there are {whose}; `discwright keys add` makes one"])
    return GOOD


def _revoke(asked: argparse.Namespace, parts: Parts, now: datetime) -> int:
    key = revoke_for_good(parts.store, parts.files, asked.key, now)
    if key is None:
        raise CommandError(f"there is no key {asked.key!r}; `discwright keys list` shows those there are")
    if asked.json:
        say_json(key_told(key))
    else:
        say([f"{key.id} ({key.title}, of {key.owner.title}) opens nothing any more"])
    return GOOD


def _row(key: KeyTold, now: datetime) -> tuple[str, ...]:
    state = "in force" if key.revoked_at is None else f"revoked {key.revoked_at:%Y-%m-%d}"
    if key.is_test:
        state += ", for tests"
    return (key.id, key.owner.title, key.title, ",".join(key.scopes), _ago(key.last_used_at, now), state)


def _ago(at: datetime | None, now: datetime) -> str:
    if at is None:
        return "never"
    return "just now" if now - at < timedelta(minutes=2) else f"{at:%Y-%m-%d %H:%M} UTC"


@contextmanager
def _opened() -> Iterator[Parts]:
    try:
        parts = open_parts(settings_from(os.environ))
    except (SettingsError, StoreError) as fault:
        raise CommandError(str(fault)) from fault
    try:
        yield parts
    except StoreError as fault:
        raise CommandError(str(fault)) from fault
    finally:
        parts.store.close()


def _scopes(text: str) -> frozenset[Scope]:
    words = [word.strip() for word in text.split(",")]
    try:
        return frozenset(Scope) if words == [EVERY_SCOPE] else scopes_of(words)
    except ScopeError as fault:
        raise argparse.ArgumentTypeError(str(fault)) from fault


def _title(text: str) -> str:
    try:
        return checked_title(text)
    except TitleError as fault:
        raise argparse.ArgumentTypeError(str(fault)) from fault
