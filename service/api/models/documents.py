"""Movements and cutters that are kept, as requests ask for them and answers tell them."""

from typing import Annotated, Any, Literal

from pydantic import BaseModel, Field, GetJsonSchemaHandler, create_model

from layout.documents.reading import Part

DESCRIBED_BY = "x-described-by"


class Described:
    """Says in the API document what a value is that is checked later, by a reader of its own."""

    def __init__(self, model: type[BaseModel]) -> None:
        """Note by which model."""
        self._model = model

    def __get_pydantic_json_schema__(self, core_schema: object, handler: GetJsonSchemaHandler) -> dict[str, Any]:
        """The name of the model, from which `api_schemas` makes a reference."""
        return {DESCRIBED_BY: self._model.__name__}


MOST_LISTED = 200  # documents of one page


class DocumentsQuery(Part):
    """Which movements or cutters are listed."""

    after: Annotated[str, Field(max_length=64)] = Field(default="", description="only ids past this one")
    limit: Annotated[int, Field(ge=1, le=MOST_LISTED)] = Field(
        default=MOST_LISTED, description="how many at most; the header Link leads to the next page"
    )


class RevisionQuery(Part):
    """Which revision of a document is told."""

    revision: Annotated[int, Field(ge=1, le=2_147_483_647)] | None = Field(
        default=None, description="which revision; the newest where it is left out"
    )


# Made by a call, since "as" is a word of the language and cannot be written as a field.
_AS: Any = {
    "as": (
        Literal["resolved", "written"],
        Field(
            default="resolved",
            description="resolved: every number plain, every track listed; written: the text as it was sent, with "
            "what it says of the worth of its numbers",
        ),
    )
}
DocumentQuery = create_model(
    "DocumentQuery", __base__=RevisionQuery, __doc__="Which revision of a document is told, and how.", **_AS
)


class SavedAnswer(Part):
    """A document as it was saved."""

    id: str
    revision: int
    sha256: str = Field(description="of the text as it is kept")
    entity_tag: str = Field(description="for If-Match, where it is changed again")
    links: dict[str, str]


class FaultAnswer(Part):
    """A fault of a document."""

    pointer: str = Field(description='the place, as a JSON pointer; "" for the whole document')
    detail: str = Field(description="what is wrong there")


class CheckAnswer(Part):
    """What is wrong with a document; nothing where it could be saved."""

    faults: list[FaultAnswer] = Field(description="the first of them")
    fault_count: int = Field(description="how many there are; rules between fields are looked at last")


class RevisionAnswer(Part):
    """A revision of a document."""

    revision: int
    sha256: str = Field(description="of the text as it is kept")
    kept_by: str = Field(description='whose it is: "own", "shop", or "shipped" with the program')
    saved_at: str | None = Field(description="when; null for one that ships")
    saved_by: str | None = Field(description="the title of the key; null for what is not this owner's")
    withdrawn_at: str | None = Field(description="since when it is not offered any more; null where it is")
    href: str


class RevisionsAnswer(Part):
    """The revisions of a document, the newest first."""

    revisions: list[RevisionAnswer]
