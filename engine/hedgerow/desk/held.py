"""Positions held: what the rule says of each at the close."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import Any

from hedgerow.desk.close import Close
from hedgerow.desk.conditions import Sight
from hedgerow.rules.schema import Strategy


def holdings(
    positions: str | Path | Mapping[str, Any] | None, close: Close, strategy: Strategy, sight: Sight
) -> Any:
    """Nothing yet."""
    return None
