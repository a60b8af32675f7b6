"""The digest that an export carries: which chain and target it was made from.

Everything that can change the exported numbers or their comments is in the text that is hashed; identities, which
are never saved, are not. Floats are written as their shortest decimals, so that it is the same on every system.
"""

import hashlib
import json
from dataclasses import asdict
from typing import Any

from tonebench.core.chain import Chain
from tonebench.target.arithmetic import Target


def canonical_text(chain: Chain, target: Target) -> str:
    """Return chain and target as one line of JSON with sorted keys, in plain ASCII."""
    values = {"chain": asdict(chain), "target": asdict(target)}
    for section in values["chain"]["sections"]:
        del section["identity"]
    return json.dumps(_plain(values), sort_keys=True, ensure_ascii=True, separators=(",", ":"))


def digest(chain: Chain, target: Target) -> str:
    """Return the SHA-256 of the canonical text, in hexadecimal."""
    return hashlib.sha256(canonical_text(chain, target).encode("ascii")).hexdigest()


def _plain(value: Any) -> Any:
    """Return whole numbers as floats, so that 48000 and 48000.0 are the same chain."""
    if isinstance(value, dict):
        return {key: _plain(one) for key, one in value.items()}
    if isinstance(value, list | tuple):
        return [_plain(one) for one in value]
    if isinstance(value, int) and not isinstance(value, bool):
        return float(value)
    return value
