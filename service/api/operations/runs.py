"""Runs: many orders from one archive of tunes."""

import io
import zipfile

from service.api.describing import Answer, Body, Example, FormPart, Operation
from service.api.models.runs import ItemsAnswer, ItemsQuery, RunAnswer, RunBody, RunsAnswer, RunsQuery
from service.api.operations.common import (
    CONTENT_LOCATION,
    CSRF_TOKEN,
    FORM,
    IDEMPOTENCY_KEY,
    LOCATION,
    NEXT,
    SAVED_AS,
    SMALL_TUNE,
    ZIP,
    told,
)
from service.media_types import JSON_MEDIA_TYPE

TAG = "runs"
LONG_AGO = (1980, 1, 1, 0, 0, 0)


def _small_archive() -> bytes:
    out = io.BytesIO()
    with zipfile.ZipFile(out, "w") as archive:
        archive.writestr(zipfile.ZipInfo("four-notes.mid", LONG_AGO), SMALL_TUNE)
    return out.getvalue()


BEGIN = Operation(
    id="begin_run",
    tag=TAG,
    summary="Order many discs at once",
    description="A form with a ZIP archive of tunes, and which of them are for which movements. Each pair becomes an "
    "order of its own, bit by bit, as workers get to it: so that orders placed alone need not wait for them all. A "
    "movement or cutter named without a revision is the one in force now for the whole run. A pair that cannot be "
    "ordered is refused with its reason, and the others go on. A run goes on though its key is revoked meanwhile.",
    headers=(IDEMPOTENCY_KEY, CSRF_TOKEN),
    bodies=(
        Body(
            media_type=FORM,
            parts=(
                FormPart(
                    name="archive",
                    meaning="A ZIP archive without a password; the names of its tunes end in .mid or .midi.",
                    media_type=ZIP,
                    is_required=True,
                ),
                FormPart(
                    name="run",
                    meaning="What is ordered.",
                    media_type=JSON_MEDIA_TYPE,
                    model=RunBody,
                    is_required=True,
                ),
            ),
        ),
    ),
    answers=(told(RunAnswer, "The run; workers open it.", LOCATION, CONTENT_LOCATION, status=202),),
    problems=(
        *("archive-unreadable", "document-invalid", "scope-missing", "multipart-unreadable"),
        *("parameter-missing", "parameter-invalid"),
    ),
    examples=(
        Example(
            status=202,
            headers={"Idempotency-Key": '"spring-list"'},
            media_type=FORM,
            body={
                "archive": _small_archive(),
                "run": {"movements": ["fernhollow-31", "tarnlight-17"], "reference": "spring list"},
            },
        ),
    ),
)
LIST = Operation(
    id="list_runs",
    tag=TAG,
    summary="Runs, the newest first",
    query=RunsQuery,
    answers=(told(RunsAnswer, "A page of runs.", NEXT),),
    examples=(Example(status=200, query={"limit": 10}),),
)
TELL = Operation(
    id="tell_run",
    tag=TAG,
    summary="A run, and how many of its pairs are in which state",
    answers=(told(RunAnswer, "The run as it is now."),),
    problems=("order-unknown",),
    examples=(Example(status=200, given="a run"),),
)
ITEMS = Operation(
    id="list_run_items",
    tag=TAG,
    summary="The pairs of a run, and what became of each",
    query=ItemsQuery,
    answers=(told(ItemsAnswer, "A page of pairs, in the order asked.", NEXT),),
    problems=("order-unknown",),
    examples=(Example(status=200, given="a run", query={"after": 0, "limit": 100}),),
)
RESULTS = Operation(
    id="tell_run_results",
    tag=TAG,
    summary="The files of a run in one archive",
    description="A folder for each order that has a plan, and run.json, a list of all pairs. Cutting files are in it "
    "where the order is released; what was planned anew or called back since is left out.",
    answers=(Answer(status=200, meaning="A ZIP archive.", contents={ZIP: None}, headers=(SAVED_AS,)),),
    problems=("order-unknown",),
    examples=(Example(status=200, given="a run"),),
)
