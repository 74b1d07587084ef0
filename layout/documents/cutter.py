"""The cutter document: the machine that cuts, its numbers and its layer names."""

from collections.abc import Mapping
from types import MappingProxyType
from typing import Annotated, Any, Literal, Self

from pydantic import ConfigDict, Field, model_validator

from layout.documents.conditions import EMPTY, LEFT_OUT, NO, STATED, where
from layout.documents.making import (
    Bridges,
    FeatureRules,
    Feeds,
    Foot,
    LeadIn,
    NetSection,
    Press,
    Rates,
    Springback,
    ToleranceClass,
)
from layout.documents.reading import (
    Angle,
    At,
    Identifier,
    Length,
    LengthOrZero,
    Offset,
    Part,
    Title,
    Within,
    check_document,
    read_json,
)

# Our layer names, each with the colour index (AutoCAD Color Index of the DXF reference) it has
# unless the cutter maps it. Colours only tell layers apart; shops map them to their own.
LAYER_COLOURS = {
    "SLITS": 1,
    "SLOTS": 30,
    "HITS": 6,
    "HOLES": 4,
    "RIM": 5,
    "LEADS": 2,
    "MARKS": 8,
    "AFTER_FORMING": 3,
    "FOLDS": 140,
    "TRACKS": 9,
}
# The face that lies above, by the way a press forms its tabs: those stand on the star side.
UPPER_FACE = MappingProxyType({"up": "star-side", "down": "label-side"})
SAME_PLACE_MM = 1e-6  # mm; a nanometre, what rounding in a written document may leave
WIDEST_WEB_MM = 50.0  # mm; a hundred times a usual web, keeps a document from being made slow
MOST_TOOLS = 60  # tools; more than a press's magazine holds, keeps a document small


class Fold(Part):
    """How this laser's shop folds a standing projection out of a U-shaped cut."""

    model_config = ConfigDict(
        json_schema_extra={
            "allOf": [
                where("slit", "channel", {"slit_width_mm": STATED}),
                where("slit", "centre-line", {"slit_width_mm": LEFT_OUT, "relief_width_mm": LEFT_OUT}),
            ]
        }
    )

    inside_radius_mm: Length
    fold_side: Literal["behind", "ahead"]
    relief_mm: LengthOrZero
    slit: Literal["channel", "centre-line"]
    slit_width_mm: Length | None = None
    relief_width_mm: Length | None = None
    relief_ends: Literal["square", "round"] = "square"
    least_inside_radius_mm: Length | None = None
    springback: Springback | None = None

    @model_validator(mode="after")
    def _channel_has_a_width(self) -> Self:
        if self.slit == "channel" and self.slit_width_mm is None:
            raise At("/slit_width_mm", 'slit "channel" needs slit_width_mm')
        if self.slit == "centre-line" and self.slit_width_mm is not None:
            raise At("/slit_width_mm", 'slit "centre-line" is as wide as the kerf; leave slit_width_mm out')
        if self.slit == "centre-line" and self.relief_width_mm is not None:
            raise At("/relief_width_mm", 'slit "centre-line" has no room for relief_width_mm; use a channel')
        return self


class Tool(Part):
    """A press tool. Its footprint is centred on the strike point, length along the travel.

    A lance cuts three sides of its footprint and forms the tab in the same hit. A slot tool's
    footprint has round ends. `edge_ahead_mm` is how far the working edge lies ahead of the
    strike point, in the direction of travel (negative: behind it). A hole tool strikes the blank's own
    holes and slots; it has round ends whichever way it is longer, is round where both sizes are equal,
    and has no working edge.
    """

    model_config = ConfigDict(
        json_schema_extra={
            "allOf": [
                where("makes", "lance", {"edge_ahead_mm": STATED, "tab_width_mm": STATED, "tab_depth_mm": STATED}),
                where("makes", "slot", {"edge_ahead_mm": STATED}),
                where("makes", "hole", {"tab_width_mm": LEFT_OUT, "tab_depth_mm": LEFT_OUT}),
            ]
        }
    )

    tool: Annotated[str, Field(pattern=r"^[A-Z0-9][A-Z0-9-]{0,15}$", examples=["L12"])]
    title: Title
    makes: Literal["lance", "slot", "hole"]
    footprint_length_mm: Length
    footprint_width_mm: Length
    edge_ahead_mm: Offset = 0.0
    tab_width_mm: Length | None = None
    tab_depth_mm: Length | None = None
    foot: Foot | None = None

    @model_validator(mode="after")
    def _hole_tools_only_strike_out(self) -> Self:
        if self.makes != "hole":
            if "edge_ahead_mm" not in self.model_fields_set:
                raise At("/edge_ahead_mm", f"{self.makes} tool {self.tool} needs edge_ahead_mm")
        elif self.edge_ahead_mm != 0:
            raise At("/edge_ahead_mm", f"hole tool {self.tool} has no working edge; leave edge_ahead_mm out")
        elif self.tab_width_mm is not None or self.tab_depth_mm is not None:
            raise At("/tab_width_mm", f"hole tool {self.tool} forms no tab; leave tab_width_mm and tab_depth_mm out")
        return self

    @model_validator(mode="after")
    def _fields_of_its_kind(self) -> Self:
        if self.makes == "hole":
            return self
        if self.makes == "lance":
            if self.tab_width_mm is None or self.tab_depth_mm is None:
                raise At("/tab_width_mm", f"lance tool {self.tool} needs tab_width_mm and tab_depth_mm")
            if self.footprint_width_mm < self.tab_width_mm:
                raise At("/footprint_width_mm", f"tool {self.tool}: footprint_width_mm is below tab_width_mm")
            if abs(self.edge_ahead_mm) > self.footprint_length_mm / 2:
                raise At(
                    "/edge_ahead_mm", f"tool {self.tool}: edge_ahead_mm puts the working edge outside the footprint"
                )
        elif self.footprint_length_mm < self.footprint_width_mm:
            raise At("/footprint_length_mm", f"slot tool {self.tool}: footprint_length_mm is below footprint_width_mm")
        elif abs(self.edge_ahead_mm + self.footprint_length_mm / 2) > SAME_PLACE_MM:
            # A slot works with its trailing end, and its footprint is centred on the strike point.
            raise At(
                "/edge_ahead_mm", f"slot tool {self.tool}: edge_ahead_mm must be minus half of footprint_length_mm"
            )
        return self


class Layer(Part):
    """The layer name and colour index a cutter wants for one of ours."""

    name: Annotated[str, Field(pattern=r"^[A-Za-z0-9_$-]{1,31}$", examples=["CUT_1"])]
    colour: Annotated[int, Field(ge=1, le=255)]


Layers = Annotated[dict[str, Layer], Field(json_schema_extra={"propertyNames": {"enum": [*LAYER_COLOURS]}})]


def layer_of(layers: Mapping[str, Layer], ours: str) -> Layer:
    """The layer name and colour wanted for one of our layer names: ours where nothing else is."""
    return layers.get(ours) or Layer(name=ours, colour=LAYER_COLOURS[ours])


def check_layers(layers: Mapping[str, Layer]) -> None:
    """Raise ValueError where layers are wanted for a name that is none of ours, or two would be one."""
    unknown = sorted(set(layers) - set(LAYER_COLOURS))
    if unknown:
        raise ValueError(f"layers: no layer of ours is called {unknown[0]!r}; ours are {', '.join(LAYER_COLOURS)}")
    seen: dict[str, str] = {}
    for ours in LAYER_COLOURS:
        wanted = layer_of(layers, ours).name
        if wanted.casefold() in seen:
            raise ValueError(f"layers: {seen[wanted.casefold()]} and {ours} would share the layer {wanted!r}")
        seen[wanted.casefold()] = ours


def _by_its_kind(schema: dict[str, Any]) -> None:
    """Say which parts go with which kind, and that `drawn_from` may be left out where the press states how it forms."""
    schema["required"].remove("drawn_from")
    press = {"type": "object", "properties": {"forms": {"enum": list(UPPER_FACE)}}, "required": ["forms"]}
    schema["allOf"] = [
        where("kind", "laser", {"tools": EMPTY, "press": LEFT_OUT}),
        where(
            "kind", "punch-press", {"fold": LEFT_OUT, "lead_in": LEFT_OUT, "bridges": LEFT_OUT, "kerf_compensated": NO}
        ),
        {"if": {"not": {"properties": {"press": press}, "required": ["press"]}}, "then": {"required": ["drawn_from"]}},
    ]


class Cutter(Part):
    """A cutting machine and what it can do to the sheet.

    `drawn_from` may be left out where the press states which way it `forms`: formed up, the star side lies above and
    is drawn; formed down, the label side.
    """

    model_config = ConfigDict(json_schema_extra=_by_its_kind)

    format: Literal["discwright-cutter/1"]
    id: Identifier
    title: Title
    kind: Literal["laser", "punch-press"]
    kerf_mm: LengthOrZero
    kerf_compensated: bool = False
    min_web_mm: Annotated[Length, Within(le=WIDEST_WEB_MM)]
    min_slot_mm: Length
    position_tolerance_mm: LengthOrZero
    angle_tolerance_deg: Annotated[Angle, Within(ge=0)] = 0.0
    drawn_from: Literal["label-side", "star-side"]
    fold: Fold | None = None
    tools: Annotated[tuple[Tool, ...], Field(max_length=MOST_TOOLS)] = ()
    layers: Layers = Field(default_factory=dict)
    drawing_release: Literal["R2010", "R12"] = "R2010"
    labels: bool = True
    burr_side: Literal["label-side", "star-side"] | None = None
    feeds: Feeds | None = None
    rates: Rates | None = None
    lead_in: LeadIn | None = None
    bridges: Bridges | None = None
    feature_rules: FeatureRules | None = None
    net_section: NetSection | None = None
    tolerance_class: ToleranceClass | None = None
    press: Press | None = None

    @model_validator(mode="after")
    def _parts_of_its_kind(self) -> Self:
        if self.kind == "punch-press" and self.fold is not None:
            raise At("/fold", "a punch press lances; leave fold out")
        if self.kind == "laser" and self.tools:
            raise At("/tools", "a laser has no tools; leave tools out")
        if self.kind == "laser" and self.press is not None:
            raise At("/press", "a laser is no press; leave press out")
        if self.kind == "punch-press" and (self.lead_in is not None or self.bridges is not None):
            raise At(
                "/bridges" if self.lead_in is None else "/lead_in",
                "a punch press has no lead_in and no bridges; leave them out",
            )
        if self.kerf_compensated and (self.kind == "punch-press" or self.kerf_mm == 0):
            raise At("/kerf_compensated", "kerf_compensated true needs a laser with kerf_mm above 0")
        if self.fold is not None and self.fold.slit == "centre-line" and self.kerf_mm == 0:
            raise At("/kerf_mm", 'slit "centre-line" needs kerf_mm above 0')
        numbers = [tool.tool for tool in self.tools]
        if len(set(numbers)) != len(numbers):
            raise At("/tools", "two tools have the same name")
        return self

    @model_validator(mode="after")
    def _layers_stay_apart(self) -> Self:
        try:
            check_layers(self.layers)
        except ValueError as error:
            raise At("/layers", str(error)) from error
        return self

    def layer(self, ours: str) -> Layer:
        """The layer name and colour this cutter wants for one of our layer names."""
        return layer_of(self.layers, ours)


def read_cutter(text: str | bytes) -> Cutter:
    """A cutter document.

    Raises:
        DocumentError: Not JSON, or not a valid cutter; names every fault found.
    """
    plain, _ = read_json(text, document="cutter")
    return check_document(Cutter, _showing_the_upper_face(plain), document="cutter")


def _showing_the_upper_face(value: object) -> object:
    """With the side drawn where none is stated, by the way the press forms: tabs stand on the star side."""
    press = value.get("press") if isinstance(value, Mapping) else None
    if not isinstance(value, Mapping) or not isinstance(press, Mapping) or "drawn_from" in value:
        return value
    side = UPPER_FACE.get(str(press.get("forms")))
    return value if side is None else {**value, "drawn_from": side}
