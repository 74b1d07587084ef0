"""The work sheet of one disc, as a PDF."""

from layout.write.work_sheet.sheet import write_work_sheet

__all__ = ["write_work_sheet"]
