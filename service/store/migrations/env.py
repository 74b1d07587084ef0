"""What alembic runs: on the connection it was handed, inside the transaction that is open there."""

from typing import Any, Literal

from alembic import context
from alembic.autogenerate.api import AutogenContext

from service.store.columns import Moment
from service.store.tables import Row


def _in_our_words(kind: str, thing: Any, new: AutogenContext) -> str | Literal[False]:
    if kind == "type" and isinstance(thing, Moment):
        new.imports.add("from service.store.columns import Moment\n")
        return "Moment()"
    return False


context.configure(
    connection=context.config.attributes["connection"],
    target_metadata=Row.metadata,
    render_as_batch=True,
    render_item=_in_our_words,
    compare_type=True,
)
context.run_migrations()
