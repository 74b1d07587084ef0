"""What is sent and told: sheets. Written by generate.py from the API document; not to be changed by hand."""

from typing import Any

SheetPlanAnswer = dict[str, Any]
