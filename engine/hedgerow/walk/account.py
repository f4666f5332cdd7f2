"""The account a rule is walked with."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from hedgerow.errors import Fault, StudyError, nearest_word
from hedgerow.kernels.layout import MARGIN_CASH, MARGIN_REGULATION, Costs

__all__ = ["COST_RANGES", "DEFAULT_COSTS", "MARGINS", "NO_COSTS", "Account"]

# Half-spread: quoted half-spreads of S&P 500 stock options 2004-15 were 8.6 % of the premium over all
# strikes, effective ones 6.8 %, and patient traders paid less than 40 % of that (Muravyev & Pearson 2020);
# at the money on liquid names the full spread is 2-4 % of mid, far out 10 % and up. Commissions as of the
# 2020s, from memory.
DEFAULT_COSTS = Costs(
    half_spread=0.03,
    spread_rise=0.5,
    floor_ticks=0.5,
    use_ticks=1.0,
    contract_fee=0.65,
    share_fee=0.0,
    trade_fee=0.0,
    assignment_fee=0.0,
    slippage=0.0002,
    borrow=0.005,
)
COST_RANGES: dict[str, tuple[float, float]] = {
    "half_spread": (0.0, 0.5),
    "spread_rise": (0.0, 10.0),
    "floor_ticks": (0.0, 20.0),
    "use_ticks": (0.0, 1.0),
    "contract_fee": (0.0, 10_000.0),
    "share_fee": (0.0, 10_000.0),
    "trade_fee": (0.0, 10_000.0),
    "assignment_fee": (0.0, 10_000.0),
    "slippage": (0.0, 0.1),
    "borrow": (0.0, 5.0),
}  # the least and the most of each, in the unit of `Costs`
MARGINS = {"cash": MARGIN_CASH, "regulation": MARGIN_REGULATION}
NO_COSTS = Costs(*([0.0] * len(Costs._fields)))


@dataclass(frozen=True, slots=True)
class Account:
    """Cash (money) and how it is shared out.

    `per_position` is the share of equity one position may tie up, `most_positions` and `most_new_a_day` are
    counts, and so is `most_per_sector`, which leaves symbols of no known sector alone. `interest` says
    whether cash earns the market's rate, `margin` what must stand behind what could be owed: all of it in
    cash, or what the regulation asks for. Raises StudyError with every fault.
    """

    cash: float = 100_000.0
    per_position: float = 1.0 / 3.0
    most_positions: int = 1000
    most_new_a_day: int = 1000
    interest: bool = True
    most_per_sector: int = 1000
    margin: str = "cash"

    def __post_init__(self) -> None:
        faults = list(self._faults())
        if faults:
            raise StudyError(faults)

    def _faults(self) -> Iterator[Fault]:
        if not 0.0 < self.cash < 1e15:
            yield Fault("account", 0, 0, "range", f"the cash is {self.cash:g}", "more than 0 is allowed")
        if not 0.0 < self.per_position <= 1.0:
            found = f"the share of equity a position is {self.per_position:g}"
            yield Fault("account", 0, 0, "range", found, "more than 0 and at most 1 is allowed")
        for name in ("most_positions", "most_new_a_day", "most_per_sector"):
            if getattr(self, name) < 1:
                found = f"`{name}` is {getattr(self, name)}"
                yield Fault("account", 0, 0, "range", found, "a count of at least 1 is allowed")
        if self.margin not in MARGINS:
            found, allowed = f"the margin is `{self.margin}`", f"one of {', '.join(MARGINS)} is allowed"
            yield Fault("account", 0, 0, "choice", found, allowed, nearest_word(self.margin, MARGINS))
