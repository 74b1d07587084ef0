"""Exports of what is kept of an owner."""

from service.api.describing import Answer, Example, Operation
from service.api.models.exports import ExportQuery
from service.api.operations.common import SAVED_AS, ZIP

TAG = "data"

EXPORT = Operation(
    id="export_owner",
    tag=TAG,
    summary="All that is kept of one owner",
    description="Orders, plans, events, quotes, runs, hooks and messages as lines of JSON; movements, cutters, tunes "
    "and drawings as they were sent and made; about.json says whose and when. Secrets are left out. A file that the "
    "service has lost is named in lost-files.json. The archive is made while it is sent: one that was cut off does not "
    "open.",
    query=ExportQuery,
    answers=(Answer(status=200, meaning="A ZIP archive.", contents={ZIP: None}, headers=(SAVED_AS,)),),
    problems=("order-unknown", "key-for-tests"),
    examples=(Example(status=200),),
)
