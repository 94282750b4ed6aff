"""Files of meshes and fields, and the folder that a run leaves behind."""

from cupfem.exchange.fields import write_fields
from cupfem.exchange.place import check_place
from cupfem.exchange.run_folder import write_incomplete, write_run

__all__ = ["check_place", "write_fields", "write_incomplete", "write_run"]
