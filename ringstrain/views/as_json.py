"""JSON: one compact line for each structure."""

from __future__ import annotations

import json
import math
from typing import Any

from ringstrain.analysis import SCHEMA, Analysis
from ringstrain.errors import RingstrainError


def to_line(document: dict[str, Any]) -> str:
    """A document as one line of ASCII, floats rounded and never NaN."""
    return json.dumps(rounded(document), ensure_ascii=True, allow_nan=False, separators=(",", ":"))


def rounded(value: Any) -> Any:
    """The same with six decimals, six figures below one; what is not finite becomes null."""
    if isinstance(value, float):
        if not math.isfinite(value):
            return None
        if abs(value) < 1e-12:
            return 0.0
        return round(value, 6) if abs(value) >= 1 else float(f"{value:.6g}")
    if isinstance(value, dict):
        return {key: rounded(item) for key, item in value.items()}
    if isinstance(value, list | tuple):
        return [rounded(item) for item in value]
    return value


def chairs_document(analysis: Analysis) -> dict[str, Any]:
    """The chairs document of a structure, with its name and the revision of the tables."""
    document = analysis.as_dict()
    if analysis.structure.name:
        document["name"] = analysis.structure.name
    document["tables_revision"] = analysis.tables_revision
    return document


def error_document(kind: str, text: str, error: RingstrainError) -> dict[str, Any]:
    """The document of a structure that failed."""
    return {
        "schema": SCHEMA,
        "kind": kind,
        "input": text,
        "error": {
            "family": error.family,
            "code": error.code,
            "message": error.message,
            "atoms": list(error.atoms),
        },
    }
