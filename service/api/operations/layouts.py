"""Layouts, trial pieces and sheets: computed at once, and kept for a while or not at all."""

from dataclasses import replace

from layout.documents import Cutter, Movement, Settings
from layout.documents.sheets import SheetJob
from service.api.describing import Answer, Body, Example, FormPart, HeaderField, Operation
from service.api.models.layouts import (
    DespiteQuery,
    LayoutAnswer,
    LayoutQuery,
    MadeAnswer,
    NoQuery,
    TrialPieceQuery,
)
from service.api.models.report_records import FileRecord
from service.api.models.workshop_records import SheetPlanAnswer, TrialPieceAnswer
from service.api.operations.common import (
    CONTENT_LOCATION,
    CSRF_TOKEN,
    DXF,
    ETAG,
    FORM,
    IF_NONE_MATCH,
    LOCATION,
    MIDI,
    NOT_MODIFIED,
    PDF,
    SAVED_AS,
    SMALL_TUNE,
    SVG,
    TUNE_PART,
    ZIP,
    accept,
)
from service.api.posted import TUNE_MEDIA_TYPES
from service.media_types import JSON_MEDIA_TYPE, MEDIA_TYPES

MOVEMENT_PART = FormPart(name="movement", meaning="A movement of your own.", media_type=JSON_MEDIA_TYPE, model=Movement)
CUTTER_PART = FormPart(name="cutter", meaning="A cutter of your own.", media_type=JSON_MEDIA_TYPE, model=Cutter)
SETTINGS_PART = FormPart(name="settings", meaning="A settings document.", media_type=JSON_MEDIA_TYPE, model=Settings)
DOCUMENT_PARTS = (MOVEMENT_PART, CUTTER_PART, SETTINGS_PART)
ITEMS = HeaderField(name="Link", meaning='Of several discs, the address of each, with rel="item" (RFC 6573).')

MAKE = Operation(
    id="make_layout",
    tag="layouts",
    summary="Make a layout of a tune",
    description="A tune and a movement become a disc, or several where the settings say so. It is planned while you "
    "wait, kept for a while under its fingerprint, and no order is made.",
    query=LayoutQuery,
    headers=(accept(JSON_MEDIA_TYPE, SVG, DXF, ZIP), CSRF_TOKEN),
    bodies=(
        *(Body(media_type=media_type) for media_type in TUNE_MEDIA_TYPES),
        Body(
            media_type=FORM,
            parts=(
                replace(TUNE_PART, is_required=True),
                *DOCUMENT_PARTS,
            ),
        ),
    ),
    answers=(
        Answer(
            status=201,
            meaning="The layout, or one for each disc.",
            contents={JSON_MEDIA_TYPE: MadeAnswer},
            headers=(ETAG, LOCATION, ITEMS),
        ),
        Answer(
            status=200,
            meaning="The file that Accept asks for.",
            contents={SVG: None, DXF: None, ZIP: None},
            headers=(ETAG, CONTENT_LOCATION, SAVED_AS),
        ),
    ),
    problems=(
        *("tune-missing", "midi-unreadable", "document-invalid", "rulings-contradict", "not-good-to-cut"),
        *("movement-unknown", "cutter-unknown", "parameter-missing", "multipart-unreadable", "not-acceptable"),
        "layout-outdated",
        "too-much-to-compute",
    ),
    examples=(
        Example(status=201, query={"movement": "fernhollow-31"}, media_type=MIDI, body=SMALL_TUNE),
        Example(
            status=201,
            query={"movement": "fernhollow-31", "cutter": "fibre-laser"},
            media_type=FORM,
            body={"tune": SMALL_TUNE, "settings": {"title": "Four notes"}},
        ),
        Example(
            status=200,
            query={"movement": "fernhollow-31"},
            headers={"Accept": DXF},
            media_type=MIDI,
            body=SMALL_TUNE,
        ),
    ),
)
TELL = Operation(
    id="tell_layout",
    tag="layouts",
    summary="A layout that is kept",
    query=DespiteQuery,
    headers=(IF_NONE_MATCH,),
    answers=(
        Answer(status=200, meaning="The layout.", contents={JSON_MEDIA_TYPE: LayoutAnswer}, headers=(ETAG,)),
        NOT_MODIFIED,
    ),
    problems=("layout-unknown", "layout-outdated", "too-much-to-compute"),
    examples=(Example(status=200, given="a layout"),),
)
_FILES = {media_type.partition(";")[0]: None for media_type in MEDIA_TYPES.values()}
FILE = Operation(
    id="tell_layout_file",
    tag="layouts",
    summary="A file of a layout",
    query=DespiteQuery,
    headers=(IF_NONE_MATCH,),
    answers=(
        Answer(
            status=200,
            meaning="The file.",
            contents={**_FILES, JSON_MEDIA_TYPE: FileRecord},
            headers=(ETAG, SAVED_AS),
        ),
        NOT_MODIFIED,
    ),
    problems=("layout-unknown", "layout-outdated", "not-good-to-cut", "too-much-to-compute"),
    examples=(Example(status=200, given="a layout", path={"file_name": "disc.svg"}),),
)
SETTINGS = Operation(
    id="tell_layout_settings",
    tag="layouts",
    summary="The settings a layout was made with",
    description="What is left out has its default.",
    headers=(IF_NONE_MATCH,),
    answers=(
        Answer(status=200, meaning="The settings.", contents={JSON_MEDIA_TYPE: Settings}, headers=(ETAG, SAVED_AS)),
        NOT_MODIFIED,
    ),
    problems=("layout-unknown",),
    examples=(Example(status=200, given="a layout"),),
)
TUNE = Operation(
    id="tell_layout_tune",
    tag="layouts",
    summary="The tune a layout was made from",
    description="The MIDI file byte for byte as it was brought, to order the same disc.",
    headers=(IF_NONE_MATCH,),
    answers=(
        Answer(status=200, meaning="The tune.", contents={MIDI: None}, headers=(ETAG, SAVED_AS)),
        NOT_MODIFIED,
    ),
    problems=("layout-unknown",),
    examples=(Example(status=200, given="a layout"),),
)
AGAIN = Operation(
    id="make_layout_again",
    tag="layouts",
    summary="Lay a kept layout out again with other settings",
    description="Tune, movement and cutter stay as they are kept. The settings are the whole document, rulings by "
    "hand among them: the best arrangement is found again around these.",
    query=DespiteQuery,
    headers=(CSRF_TOKEN,),
    bodies=(Body(media_type=JSON_MEDIA_TYPE, model=Settings),),
    answers=(
        Answer(
            status=201,
            meaning="The layout, or one for each disc.",
            contents={JSON_MEDIA_TYPE: MadeAnswer},
            headers=(ETAG, LOCATION, ITEMS),
        ),
    ),
    problems=(
        *("layout-unknown", "layout-outdated", "document-invalid", "rulings-contradict", "midi-unreadable"),
        "too-much-to-compute",
    ),
    examples=(
        Example(
            status=201,
            given="a layout",
            media_type=JSON_MEDIA_TYPE,
            body={"rulings": [{"note": 0, "do": "leave-out"}]},
        ),
    ),
)
TRIAL_PIECE = Operation(
    id="make_trial_piece",
    tag="trial pieces",
    summary="Make a trial piece of a movement and a cutter",
    query=TrialPieceQuery,
    headers=(accept(JSON_MEDIA_TYPE, DXF, PDF, ZIP), CSRF_TOKEN),
    bodies=(Body(media_type=FORM, parts=(MOVEMENT_PART, CUTTER_PART)),),
    is_body_required=False,
    answers=(
        Answer(
            status=200,
            meaning="The trial piece, as Accept asks.",
            contents={JSON_MEDIA_TYPE: TrialPieceAnswer, DXF: None, PDF: None, ZIP: None},
            headers=(SAVED_AS,),
        ),
    ),
    problems=(
        *("movement-unknown", "cutter-unknown", "parameter-missing", "document-invalid"),
        *("multipart-unreadable", "not-acceptable"),
    ),
    examples=(Example(status=200, query={"movement": "fernhollow-31"}),),
)
SHEETS = Operation(
    id="plan_sheets",
    tag="sheets",
    summary="Lay discs on sheets of stock",
    query=NoQuery,
    headers=(accept(JSON_MEDIA_TYPE, ZIP), CSRF_TOKEN),
    bodies=(
        Body(media_type=JSON_MEDIA_TYPE, model=SheetJob),
        Body(
            media_type=FORM,
            parts=(
                FormPart(name="job", meaning="The job.", media_type=JSON_MEDIA_TYPE, model=SheetJob, is_required=True),
            ),
            more_parts="^drawing-[a-z][a-z0-9-]{0,63}$",
        ),
    ),
    answers=(
        Answer(
            status=200,
            meaning="The plan, or it and its drawings in one archive, as Accept asks.",
            contents={JSON_MEDIA_TYPE: SheetPlanAnswer, ZIP: None},
            headers=(SAVED_AS,),
        ),
    ),
    problems=("parameter-missing", "document-invalid", "multipart-unreadable", "not-acceptable"),
    examples=(
        Example(
            status=200,
            media_type=JSON_MEDIA_TYPE,
            body={
                "format": "discwright-sheets/1",
                "title": "two small discs",
                "gap_mm": 5,
                "margin_mm": 10,
                "stock": [{"id": "steel", "width_mm": 500, "height_mm": 300}],
                "discs": [{"id": "small", "quantity": 2, "diameter_mm": 120}],
            },
        ),
    ),
)
