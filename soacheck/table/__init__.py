"""Strict TOML tables: each key declared once, as data; reader, messages and templates all read that
declaration."""

from __future__ import annotations

from soacheck.table.cells import Cells
from soacheck.table.declare import GRADES, CasePlan, Form, Key, Missing, Spread
from soacheck.table.document import Document, check_source, read_document
from soacheck.table.toml_text import Source, parse_source, read_source

__all__ = [
    "GRADES", "CasePlan", "Cells", "Document", "Form", "Key", "Missing", "Source", "Spread", "check_source",
    "parse_source", "read_document", "read_source",
]  # fmt: skip
