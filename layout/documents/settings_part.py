"""What the parts of the settings document share: how a field is described, and what a whole number is."""

import json
from typing import Annotated

from pydantic import BeforeValidator, ConfigDict, Field

from layout.documents.reading import NotNegative, Part, Within


class SettingsPart(Part):
    """A part of the settings; the text under each field is its description in the JSON Schema."""

    model_config = ConfigDict(use_attribute_docstrings=True)


def _whole(value: object) -> object:
    if isinstance(value, bool | str):
        raise ValueError(f"a whole number is needed, got {json.dumps(value)}")
    return value


# Stands after the bounds: pydantic writes those that follow it into the JSON Schema under names of its own.
IS_WHOLE = BeforeValidator(_whole)

Channel = Annotated[int, Field(ge=1, le=16), IS_WHOLE]
Share = Annotated[NotNegative, Within(le=1)]  # of a weight
