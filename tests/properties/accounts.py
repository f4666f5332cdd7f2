"""Random accounts and costs, and the settings under which the small random markets are walked."""

from __future__ import annotations

from hypothesis import strategies as st

from oracle.words import Setting

COSTS = {"half_spread": 0.03, "spread_rise": 0.5, "floor_ticks": 0.5, "use_ticks": 1.0, "contract_fee": 0.65}
COSTS |= {"share_fee": 0.005, "trade_fee": 1.0, "assignment_fee": 5.0, "slippage": 0.0005, "borrow": 0.01}

SHORT_BLEND = {"blend": [{"close": 5}, {"close": 20}], "history": 15}  # soon known in a short market
SHORT_SURFACE = {"horizons": (5, 20), "history": 15}  # the same, in the replay's numbers


@st.composite
def accounts(draw: st.DrawFn) -> Setting:
    """An account of any size, with and without costs."""
    return Setting(
        cash=draw(st.sampled_from((20000.0, 100000.0, 400000.0))),
        per_position=draw(st.sampled_from((1.0, 0.5, 1 / 3))),
        most_positions=draw(st.sampled_from((1, 2, 1000))),
        most_per_sector=draw(st.sampled_from((1, 1000))),
        costs=draw(st.sampled_from(({}, COSTS))),
        surface=SHORT_SURFACE,
    )
