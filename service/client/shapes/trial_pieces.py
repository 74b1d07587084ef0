"""What is sent and told: trial pieces. Written by generate.py from the API document; not to be changed by hand."""

from typing import Any

TrialPieceAnswer = dict[str, Any]
