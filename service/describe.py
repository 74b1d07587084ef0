"""`python -m service.describe` prints the API document of this version, without a service that runs."""

import sys
import tempfile
from pathlib import Path

from service.api.answers import json_bytes
from service.api.api_document import document_of
from service.app import create_app
from service.settings import PlaceSettings, ServiceSettings


def document_here() -> bytes:
    """The document as it is served where no public address is set."""
    with tempfile.TemporaryDirectory() as folder:
        places = PlaceSettings(data_directory=Path(folder) / "data", cache_directory=Path(folder) / "layouts")
        return json_bytes(document_of(create_app(ServiceSettings(places=places)), server="/"))


if __name__ == "__main__":
    sys.stdout.buffer.write(document_here())
