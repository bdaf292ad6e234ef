"""The document as JSON text: full precision, no NaN, no infinity, no control character."""

from __future__ import annotations

import json
from collections.abc import Mapping
from math import isfinite
from typing import Any


def dump(document: Mapping[str, Any]) -> str:
    """JSON of `document`, one key a line, ending with a line break. A float that is not finite is null."""
    text = json.dumps(_finite(document), indent=1, ensure_ascii=True, allow_nan=False)
    return text.replace("\x7f", "\\u007f") + "\n"  # the one control character that JSON lets stand


def _finite(value: Any) -> Any:
    if isinstance(value, float):
        return value if isfinite(value) else None
    if isinstance(value, Mapping):
        return {key: _finite(item) for key, item in value.items()}
    if isinstance(value, list | tuple):
        return [_finite(item) for item in value]
    return value
