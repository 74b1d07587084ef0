"""Report: what a disc keeps of its tune, what that cost and how exactly it will sound."""

from layout.report.reporting import report_on

__all__ = ["report_on"]
