"""The description of the system file for readers, made from the same tables that the reader follows."""

from __future__ import annotations

from vetter.system.fields import Key, Table
from vetter.system.keys import TABLES, TOP
from vetter.system.kinds import Kind, ManyTables, OneTable


def key_table() -> str:
    """Return every table and key of the system file as Markdown: key, what is allowed, what it means."""
    return "\n".join(_section(table) for table in (TOP, *TABLES))


def _section(table: Table) -> str:
    """Return one table's keys as a Markdown table under a heading."""
    heading = f"`{table.heading}`" if table.name else "Top of the file"
    lines = [f"### {heading}", "", table.meaning, "", "| key | allowed | meaning |", "|---|---|---|"]
    for key in table.keys:
        if not isinstance(key.kind, (OneTable, ManyTables)):
            lines.extend(_rows(key))
    return "\n".join([*lines, ""])


def _rows(key: Key) -> list[str]:
    """Return the line of a key and, where it has one, the line of its error."""
    meaning = f"{key.meaning} (required)" if key.required else key.meaning
    rows = [_row(key.name, key.kind, meaning)]
    if key.error and key.error_kind is not None:
        optional = " (optional)" if key.error_optional else ""
        rows.append(_row(key.error, key.error_kind, f"its one-sigma error{optional}"))
    return rows


def _row(name: str, kind: Kind, meaning: str) -> str:
    """Return one line of a Markdown table."""
    return f"| `{name}` | {kind.expected} | {meaning} |"
