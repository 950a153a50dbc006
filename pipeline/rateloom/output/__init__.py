"""The output folder: tables, changes and provenance as text, and the writing of them.

Takes results and findings; gives the files of the contract. Formatting is pure; only ``folder`` touches the disk.
Its names are loaded when they are asked for: writing a file needs no physics.
"""

from typing import TYPE_CHECKING

from rateloom.lazy import loader

if TYPE_CHECKING:
    from rateloom.output.audit_table import findings_table
    from rateloom.output.changes import changes_table
    from rateloom.output.folder import read_file, write_files
    from rateloom.output.run_record import provenance
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

__getattr__ = loader(
    __name__,
    {
        "changes": ("changes_table",),
        "audit_table": ("findings_table",),
        "folder": ("read_file", "write_files"),
        "run_record": ("provenance",),
        "tables": ("HEADERS", "equilibrium_rows", "fit_rows", "rate_rows", "species_rows", "table"),
    },
)
