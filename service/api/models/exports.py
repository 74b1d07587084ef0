"""Exports, as requests ask for them."""

from typing import Annotated

from pydantic import Field

from layout.documents.reading import Part


class ExportQuery(Part):
    """Whose data is exported."""

    owner: Annotated[str, Field(min_length=1, max_length=200)] | None = Field(
        default=None, description="the id or the title of an owner, where the shop asks; the asker's own if left out"
    )
