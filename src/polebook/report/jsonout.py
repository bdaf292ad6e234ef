"""The document as JSON text: full precision, no NaN, no infinity, no control character."""

from __future__ import annotations

import json
from collections.abc import Mapping
from typing import Any

from polebook.report.document import finite


def dump(document: Mapping[str, Any]) -> str:
    """JSON of `document`, one key a line, ending with a line break. A float that is not finite is null."""
    text = json.dumps(finite(document), indent=1, ensure_ascii=True, allow_nan=False)
    return text.replace("\x7f", "\\u007f") + "\n"  # the one control character that JSON lets stand
