"""Discs on stock: `arrange_on_sheets` lays the discs of a job on its sheets."""

from layout.sheets.arranging import arrange_on_sheets
from layout.sheets.plan import SheetPlan

__all__ = ["SheetPlan", "arrange_on_sheets"]
