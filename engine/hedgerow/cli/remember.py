"""Writing down which variants were tried on which prices."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import TYPE_CHECKING

import typer

if TYPE_CHECKING:
    from hedgerow.market import Market
    from hedgerow.study.declare import Study

__all__ = ["RUNS", "remember"]

RUNS = Path("runs")
"""Where runs go when no folder is named; the tries on the same prices are counted beside the runs."""


def remember(folder: Path, study: Study, market: Market, keys: Mapping[str, str] | None = None) -> None:
    """Add a study's variants to the record in a folder, or say aside that it cannot be done.

    `keys` are those of `study.tries.keys_of`, worked out when None.
    """
    from hedgerow.study.tries import RECORD, record_tries

    if not record_tries(folder, study, market, keys):
        typer.echo(
            f"The variants could not be added to {folder / RECORD}; later runs count too few.", err=True
        )
