"""Files of meshes and fields, and the folder that a run leaves behind."""

from cupfem.exchange.fields import write_fields
from cupfem.exchange.place import check_place
from cupfem.exchange.revolved import write_revolved
from cupfem.exchange.run_folder import write_incomplete, write_run
from cupfem.exchange.section import read_section
from cupfem.exchange.vtkhdf import write_vtkhdf

__all__ = [
    "check_place",
    "read_section",
    "write_fields",
    "write_incomplete",
    "write_revolved",
    "write_run",
    "write_vtkhdf",
]
