"""The comparison in a terminal."""

from __future__ import annotations

import io

import numpy as np
import pytest
from rich.console import Console

from builders import Builder
from hedgerow.evidence import Summary, summarise
from hedgerow.ledger import Ledger
from hedgerow.report.cautions import Basis, cautions
from hedgerow.report.text import Comparison, print_comparison, text_of
from random_logs import random_log_builder

NAMES = (
    "one week",
    "three weeks",
    "cut at two percent",
    "trend turned",
    "a long name of one variant",
    "both",
)


def summary_of(name: str, seed: int, yardstick: bool = True) -> Summary:
    """The summary of a random life under a name."""
    book = random_log_builder(seed, 30)
    book.variant = name
    curve = np.linspace(100_000.0, 123_456.0, 30) if yardstick else None
    return summarise(Ledger(book.log()), yardstick=curve)


def comparison_of(count: int, yardstick: bool = True) -> Comparison:
    """A comparison of so many variants."""
    summaries = [summary_of(name, seed, yardstick) for seed, name in enumerate(NAMES[:count])]
    return Comparison(summaries, "One week against three", "Which one?", cautions(Basis(count)))


def line_with(text: str, start: str) -> str:
    """The first line that starts with these words."""
    return next(line for line in text.splitlines() if line.strip().startswith(start))


@pytest.mark.parametrize("count", [1, 2, 3, 4, 6])
def test_never_wider_than_100_columns(count: int) -> None:
    """Compares the longest line with 100 columns, and counts the columns that name each variant."""
    text = text_of(comparison_of(count))
    assert max(len(line) for line in text.splitlines()) <= 100
    assert not any(line != line.rstrip() for line in text.splitlines())
    words = " ".join(text.split())
    assert words.count("123,456") == -(-count // 3)
    for summary in comparison_of(count).summaries:
        assert f"{summary.account.last_value:,.0f}" in text


def test_figures_are_those_of_the_summary() -> None:
    """Compares cells of the table with the figures of both summaries, the yardstick last."""
    comparison = comparison_of(2)
    text = text_of(comparison)
    first, second = comparison.summaries
    ends = line_with(text, "Value at the end").split()[-3:]
    assert ends == [f"{first.account.last_value:,.0f}", f"{second.account.last_value:,.0f}", "123,456"]
    rates = line_with(text, "Break-even win rate").split()[-2:]
    assert rates == [f"{one.break_even_win_rate * 100:.1f}%" for one in (first, second)]
    header = line_with(text, "one week")
    assert header.split() == ["one", "week", "three", "weeks", "buy", "and", "hold"]
    costs = line_with(text, "Costs").split()[-2:]
    assert costs == [f"{-one.costs:,.0f}" for one in (first, second)]


def test_bars_show_the_shares() -> None:
    """Compares bars with outcome shares: so many sixths full, in blocks or in ASCII."""
    comparison = comparison_of(1)
    one = comparison.summaries[0]
    share = one.outcomes["cut"] / one.positions
    row = line_with(text_of(comparison), "cut")
    assert row.count("█") == round(share * 6)
    assert f"{share * 100:.1f}%" in row
    plain = line_with(text_of(comparison, draws=False), "cut")
    assert plain.count("#") == row.count("█")
    assert plain.isascii()


def test_declined_entries_and_cautions_stand_below() -> None:
    """Compares the lines below the tables with the declined entries and every caution, word for word."""
    comparison = comparison_of(2)
    words = " ".join(text_of(comparison).split())
    one = comparison.summaries[0]
    assert f"one week: not a net credit {one.declined['not a net credit']}" in words
    for caution in comparison.cautions:
        assert caution in words


def test_without_yardstick_and_without_trades() -> None:
    """Compares an account that never traded with dashes, and no column for a yardstick."""
    book = Builder()
    book.night()
    text = text_of(Comparison([summarise(Ledger(book.log()))], "Nothing"))
    assert "buy and hold" not in text
    assert line_with(text, "Win rate").split()[-1] == "-"
    assert "Entries not made" not in text
    assert "Before you rely" not in text


def test_plain_when_piped_and_coloured_in_a_terminal() -> None:
    """Compares what a pipe and a terminal get: no escape codes against some, the same words."""
    comparison = comparison_of(2)
    pipe, screen = io.StringIO(), io.StringIO()
    print_comparison(comparison, Console(file=pipe))
    print_comparison(
        comparison, Console(file=screen, force_terminal=True, color_system="standard", width=140)
    )
    assert pipe.getvalue() == text_of(comparison)
    assert "\x1b[" not in pipe.getvalue()
    assert "\x1b[1m" in screen.getvalue()


@pytest.mark.parametrize(("odds", "code"), [(0.9, "32"), (0.1, "33")])
def test_win_rate_is_marked_against_its_break_even(odds: float, code: str) -> None:
    """Compares the colour of the win rate with whether it is above its break-even rate."""
    good = odds > 0.5
    book = Builder(variant="x")
    for won in (True, good, False):
        place = book.open(0, shares=100.0, net_debit=5000.0)
        book.shares(place, 100.0, 50.0, 50.0)
        book.night({0: 50.0})
        price = 51.0 if won else 49.0
        book.shares(place, -100.0, price, price)
        book.close(place)
        book.night()
    screen = io.StringIO()
    page = Console(file=screen, force_terminal=True, color_system="standard", width=100)
    print_comparison(Comparison([summarise(Ledger(book.log()))], "t"), page)
    row = next(line for line in screen.getvalue().splitlines() if "Win rate" in line)
    assert f"\x1b[{code}m" in row


def test_names_are_never_markup() -> None:
    """Compares a variant named like a style with its own name."""
    text = text_of(Comparison([summary_of("[bold]x", 1)], "[red]title", "[link]q"))
    for name in ("[bold]x", "[red]title", "[link]q"):
        assert name in text


def test_every_caution_is_said() -> None:
    """Compares the cautions with the list that must stand beside a hypothetical result.

    SEC rule 206(4)-1(d)(6) and CFTC rule 4.41, described; the rest is common practice.
    """
    said = " ".join(cautions(Basis(3, ("half spread 3%",), 0)))
    for word in (
        "Hypothetical",
        "No order was placed",
        "hindsight",
        "too much or too little",
        "promise nothing",
        "synthesized",
        "not quotes",
        "half spread 3%",
        "assumptions",
        "Survivors only",
        "Taxes are left out",
        "3 variants were tried",
        "risk disclosure document",
        "licensed adviser",
    ):
        assert word in said
    assert "2 histories end early" in " ".join(cautions(Basis(1, (), 2)))
    assert "One variant was run" in " ".join(cautions(Basis()))
    assert "Assumed here" not in " ".join(cautions(Basis()))
