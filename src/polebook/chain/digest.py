"""The digest of a chain: SHA-256 of what it says, not of how the file spells it."""

from __future__ import annotations

import hashlib
import json
from typing import Any

from polebook.chain.model import Chain, Stage


def canonical(chain: Chain) -> str:
    """Canonical JSON: SI values by repr, defaults filled in, keys sorted; no notes, title, benches or spelling."""
    content = {
        "format": 1,
        "source": chain.source_kind,
        "stages": [_stage(stage) for stage in chain.stages],
        "cards": {name: [card.family, card.polarity] for name, card in chain.cards.items()},
        "numbers": {path: value for path, value in chain.numbers.items() if not path.startswith("bench.")},
        "preferred": dict(chain.preferred),
        "shape": chain.spread_shape,
    }
    return json.dumps(content, sort_keys=True, separators=(",", ":"), ensure_ascii=True, allow_nan=False)


def of(chain: Chain) -> str:
    """64 hexadecimal digits."""
    return hashlib.sha256(canonical(chain).encode("ascii")).hexdigest()


def _stage(stage: Stage) -> dict[str, Any]:
    return {
        "name": stage.name,
        "kind": stage.kind,
        "device": stage.device,
        "upper": stage.upper,
        "left_out": stage.left_out,
        "output_to": stage.output_to,
        "lower_to": stage.lower_to,
        "free": sorted(stage.free),
        "arms": [{part: arm.role_of(part) for part in arm.parts} for arm in stage.arms],
    }
