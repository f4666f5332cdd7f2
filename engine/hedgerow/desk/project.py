"""A folder to begin with: rules, a study, positions, prices and schemas, of which everything runs at once."""

from __future__ import annotations

import datetime as dt
import math
from pathlib import Path

from hedgerow.desk.demo import Demo, demo
from hedgerow.desk.files import lay_down
from hedgerow.errors import PlaceError
from hedgerow.kernels.layout import MONTHLY
from hedgerow.market.sessions import listed_at
from hedgerow.rules.publish import as_text, strategy_schema
from hedgerow.study.publish import study_schema

__all__ = ["new_folder"]

COLLAR = """\
# yaml-language-server: $schema=../schemas/strategy.json
name: Collar
about: >-
  Shares, a call sold about two percent above the price and a put bought about five percent below it, both
  about thirty days out.
shares: long
legs:
  call:
    sell: call
    expiry: {days: 30, listed: monthly}
    strike: {from_spot: 2%, snap: up}
  put:
    buy: put
    expiry: {with: call}
    strike: {from_spot: -5%, snap: down}
accept:
  worst_loss: {at_most: 8%}
exit:
  - {name: cut, if: {loss: {at_least: 4%}}}
"""

MARRIED_PUT = """\
# yaml-language-server: $schema=../schemas/strategy.json
name: Married put
about: Shares above their mean of fifty sessions, with a put five percent below the price for ninety days.
shares: long
legs:
  put:
    buy: put
    expiry: {days: 90, listed: monthly}
    strike: {from_spot: -5%, snap: down}
enter:
  when: {signal: close_over_mean, sessions: 50}
"""

STUDY = """\
# yaml-language-server: $schema=schemas/study.json
name: My study
question: Which of the two, at my account's size and my broker's costs?
market: data
account: {cash: 250000, per_position: 1/4}
costs: {contract_fee: 0.65}
variants:
  collar: {strategy: rules/collar.yaml}
  married put: {strategy: rules/married-put.yaml}
"""

DATASET = """\
# What the tables in this folder are. The prices are invented: random walks, in which no rule knows better.
name: Invented prices
source: invented
currency: USD
adjustment: none            # prices as they traded; `splits` where a vendor has divided them by later splits
rate: 3%                    # a year, on cash and for the value of options
"""

README = """\
# A folder for hedgerow

Everything here runs as it is, on invented prices:

```
hedgerow data check data
hedgerow rules explain rules/collar.yaml
hedgerow run study.yaml
hedgerow today study.yaml --variant collar --positions positions.yaml
```

Then make it yours:

- `data/prices.csv`: one row a symbol and day, prices as they traded, in the columns of that file.
  `data/dividends.csv` has cash a share on its ex-date. Put your own in their place;
  `hedgerow data check data` says what was found. `data/dataset.yaml` says what the tables are.
- `rules/`: one file a rule. `hedgerow rules words` lists every word there is.
- `study.yaml`: your money, your costs, and which rules are compared.
- `positions.yaml`: your cash and what you hold, for the sheet of today. With your own prices it needs your
  own symbols.
- `schemas/`: an editor that reads the first line of a rule or study completes and checks its words.

Results are hypothetical, and premiums are synthesized from a volatility model. Nothing here is advice.
"""


def new_folder(folder: str | Path) -> Path:
    """Lay down a folder to begin with and return it.

    Raises PlaceError when something stands there already, or nothing can be written; then nothing is left.
    """
    place = Path(folder)

    def fill(part: Path) -> None:
        for name, text in _texts(demo()).items():
            path = part / name
            path.parent.mkdir(parents=True, exist_ok=True)
            path.write_text(text, encoding="utf-8")

    lay_down(place, _check, fill)
    return place


def _check(place: Path) -> None:
    """Raise PlaceError when something stands there."""
    if place.is_dir() and any(place.iterdir()):
        raise _taken(place, "this folder holds files already")
    if place.exists() and not place.is_dir():
        raise _taken(place, "a file of this name stands there")


def _texts(prices: Demo) -> dict[str, str]:
    """Every file by its name."""
    return {
        "README.md": README,
        "study.yaml": STUDY,
        "positions.yaml": _positions(prices),
        "rules/collar.yaml": COLLAR,
        "rules/married-put.yaml": MARRIED_PUT,
        "data/dataset.yaml": DATASET,
        "data/prices.csv": prices.prices.to_csv(index=False, lineterminator="\n", float_format="%.2f"),
        "data/dividends.csv": prices.dividends.to_csv(index=False, lineterminator="\n"),
        "schemas/strategy.json": as_text(strategy_schema()),
        "schemas/study.json": as_text(study_schema()),
    }


def _positions(prices: Demo) -> str:
    """A collar opened two weeks before the end of the invented prices, as a person would write it down."""
    opened, symbol = prices.dates[-11], "HAZEL"
    paid = prices.close(symbol, opened)
    day = dt.date.fromisoformat(opened).toordinal()
    expiry = next(int(one) for one in listed_at(MONTHLY, day) if one >= day + 21)
    call, put = math.ceil(paid * 1.02), math.floor(paid * 0.95)
    return f"""\
# What the account holds at the close that is looked at, before anything is decided there.
cash: 225000
positions:
  - symbol: {symbol}
    opened: {opened}          # the session of the fill
    shares: 300                 # as they are now, after any split
    stock_price: {paid:.2f}          # paid a share
    legs:                       # by the names of the rule's legs; one that is left out is not held
      call: {{strike: {call}, expiry: {dt.date.fromordinal(expiry)}, price: 0.85}}
      put: {{strike: {put}, expiry: {dt.date.fromordinal(expiry)}, price: 0.45}}
"""


def _taken(place: Path, why: str) -> PlaceError:
    found, remedy = f"no new folder is made here: {why}", "name another"
    return PlaceError.one(str(place), "place taken", found, "expected a new or an empty folder", remedy)
