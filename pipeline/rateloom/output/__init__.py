"""The output folder: tables, changes and provenance as text, and the writing of them.

Takes results and findings; gives the files of the contract. Formatting is pure; only ``folder`` touches the disk.
"""

from rateloom.output.changes import changes_table
from rateloom.output.findings_table import findings_table
from rateloom.output.folder import read_file, write_files
from rateloom.output.provenance import provenance
from rateloom.output.tables import HEADERS, equilibrium_rows, fit_rows, rate_rows, species_rows, table

__all__ = [
    "HEADERS",
    "changes_table",
    "equilibrium_rows",
    "findings_table",
    "fit_rows",
    "provenance",
    "rate_rows",
    "read_file",
    "species_rows",
    "table",
    "write_files",
]
