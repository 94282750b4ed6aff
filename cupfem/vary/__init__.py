"""Plans of many cases: what varies in a cup or a serving, run on all cores, and what came of it.

`plan` is the file, `paths` and `values` find and set what varies, `factors` and `design` make the points,
`cases` and `recorded` are what runs, `worker`, `pools`, `store` and `engine` run it so that nothing finished
is lost, `outcome` and `table` hold the rows, `reading` reads them, `best` searches.
"""

from cupfem.vary.cases import FunctionModel
from cupfem.vary.engine import Progress
from cupfem.vary.job import vary
from cupfem.vary.outcome import Outcome, Row
from cupfem.vary.plan import Plan, load_plan, plan_schema
from cupfem.vary.table import csv_text, write_csv, write_parquet

__all__ = [
    "FunctionModel",
    "Outcome",
    "Plan",
    "Progress",
    "Row",
    "csv_text",
    "load_plan",
    "plan_schema",
    "vary",
    "write_csv",
    "write_parquet",
]
