"""What must stand beside every hypothetical result.

Said in our own words after what United States rules ask for: SEC rule 206(4)-1(d)(6) (criteria, assumptions,
risks and limits of hypothetical performance) and CFTC rule 4.41 (simulated, not traded, made with hindsight).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

__all__ = ["Basis", "cautions", "tries_told"]

HYPOTHETICAL = (
    "Hypothetical: rules were replayed over past prices. No order was placed and no money was at risk."
)
HINDSIGHT = (
    "Simulated results are made with hindsight. They may show too much or too little of what trading would "
    "have brought, for they leave out thin markets, late fills and a trader's nerves. They promise nothing."
)
SYNTHESIZED = (
    "Option premiums are synthesized from a volatility model; they are not quotes. The premium over realized "
    "volatility, the skew and the costs are assumptions: change them and look again."
)
TAXES = "Taxes are left out."
RISK = (
    "Options carry risk and do not suit everyone: read the exchange's risk disclosure document first. "
    "Whether and to whom a result may be shown, the law and a licensed adviser decide. This is no advice."
)


@dataclass(frozen=True, slots=True)
class Basis:
    """What a result rests on: variants tried, assumptions in words, whether any symbol's history ended.

    `histories_ended` counts the symbols whose prices stop before the data does, None when not known.
    """

    variants_tried: int = 1
    assumptions: Sequence[str] = ()
    histories_ended: int | None = None


def cautions(basis: Basis) -> tuple[str, ...]:
    """Return the cautions of a result, one paragraph each, in the order in which they should be read."""
    assumed = f"Assumed here: {'; '.join(basis.assumptions)}." if basis.assumptions else ""
    parts = (
        HYPOTHETICAL,
        HINDSIGHT,
        SYNTHESIZED,
        assumed,
        _survivors(basis),
        TAXES,
        tries_told(basis.variants_tried),
        RISK,
    )
    return tuple(part for part in parts if part)


def _survivors(basis: Basis) -> str:
    if basis.histories_ended == 0:
        return (
            "Survivors only: no history in this universe ends early. Companies that failed may be missing, "
            "and that flatters every rule that holds shares."
        )
    count = basis.histories_ended
    ended = "1 history ends" if count == 1 else f"{count:,} histories end" if count else ""
    known = f" ({ended} early here)" if ended else ""
    return f"Survivorship: a universe chosen today leaves out companies that failed since{known}."


def tries_told(count: int) -> str:
    """Return what must be said of the number of variants that were tried."""
    if count <= 1:
        return "One variant was run here. Count those tried before: the best of many looks better than it is."
    return f"{count} variants were tried. The best of several looks better than it is."
