"""The page that a person hands on: one HTML file that needs nothing else."""

from cupfem.report.page import render, write_report

__all__ = ["render", "write_report"]
