"""Write: from a cut plan and a layout to the bytes of the files."""

from layout.write.dxf import write_dxf
from layout.write.hits import write_hits
from layout.write.layout_json import layout_record, write_layout_json
from layout.write.making_json import write_making
from layout.write.press_program import write_press_program
from layout.write.report_json import report_record, write_report
from layout.write.svg import write_svg

__all__ = [
    "layout_record",
    "report_record",
    "write_dxf",
    "write_hits",
    "write_layout_json",
    "write_making",
    "write_press_program",
    "write_report",
    "write_svg",
]
