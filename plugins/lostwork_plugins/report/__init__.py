"""Exporters: the ranked table for people, JSON and CSV for programs."""

from __future__ import annotations

import lostwork as lw

__all__ = ["lostwork_exporters"]


@lw.hookimpl
def lostwork_exporters() -> list[lw.ExporterDescriptor]:
    """Offer the table, JSON and CSV."""
    return [
        lw.ExporterDescriptor(
            name="table",
            summary="ranked losses, mechanisms, remarks and the whole balance, to be read",
            target="lostwork_plugins.report.table:table",
            api_version=1,
            file_suffix=".txt",
        ),
        lw.ExporterDescriptor(
            name="json",
            summary="everything in SI, versioned, with a JSON Schema",
            target="lostwork_plugins.report.structured:as_json",
            api_version=1,
            file_suffix=".json",
        ),
        lw.ExporterDescriptor(
            name="csv",
            summary="one row a step, and a row of each array, in SI",
            target="lostwork_plugins.report.rows:as_csv",
            api_version=1,
            file_suffix=".csv",
        ),
    ]
