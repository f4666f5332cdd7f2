"""Random logs that obey every convention, for tests that hold on all of them."""

from __future__ import annotations

import datetime as dt
import random

from builders import Builder
from hedgerow.kernels import layout as at

FEE = 1.23


def random_log_builder(seed: int, sessions: int = 12) -> Builder:
    """A bookkeeper after a random life: collars bought, rolled, split, called, put, cut or left open."""
    dice = random.Random(seed)
    book = Builder(sessions=sessions, opening_cash=250_000.0)
    spots = [40.0, 90.0]
    for _ in range(sessions):
        spots = [max(round(spot * dice.uniform(0.93, 1.07), 2), 5.0) for spot in spots]
        for place in list(book.held):
            _morning(dice, book, place, spots)
        for symbol in range(2):
            if dice.random() < 0.5:
                _enter(dice, book, symbol, spots[symbol])
        if dice.random() < 0.3:
            book.write(at.KIND_DECLINED, -1, symbol=0, reason=at.WHY_NET_CREDIT, quantity=1.0)
        if dice.random() < 0.3:
            book.write(at.KIND_INTEREST, -1, cash=round(dice.uniform(0, 9), 2), symbol=-1)
        mids = {(place, leg): round(dice.uniform(0.01, 3.0), 4) for place in book.held for leg in (0, 1)}
        book.night(dict(enumerate(spots)), mids)
    return book


def _enter(dice: random.Random, book: Builder, symbol: int, spot: float) -> None:
    lots = dice.randint(1, 3)
    shares = 100.0 * lots
    expiry = (dt.date(2011, 1, 3) + dt.timedelta(days=dice.randint(7, 40))).isoformat()
    call, put = round(dice.uniform(0.2, 2.0), 3), round(dice.uniform(0.2, 2.0), 3)
    stock = spot + 0.01
    debit = shares * (stock - call + put)
    terms = {
        "lots": lots,
        "shares": shares,
        "net_debit": debit,
        "best_gain": 300.0 * lots,
        "worst_loss": 400.0 * lots,
    }
    place = book.open(symbol, **terms, odds_of_best=0.5)
    book.shares(place, shares, round(stock, 2), spot, FEE)
    book.leg(place, 0, -shares, (call, call + 0.01), (round(spot) + 1.0, expiry), FEE)
    book.leg(place, 1, shares, (put, put - 0.01), (round(spot) - 2.0, expiry), FEE)


def _morning(dice: random.Random, book: Builder, place: int, spots: list[float]) -> None:
    held, symbol = book.held[place], book.symbol_of[place]
    fate = dice.random()
    if fate < 0.1:
        book.split(place, dice.choice([2.0, 3.0, 1.5]))
        spots[symbol] = round(spots[symbol] / 2, 2)
    elif fate < 0.25:
        book.dividend(place, round(dice.uniform(0.05, 0.4), 3))
    elif fate < 0.35:
        quantity = -held[0]
        book.leg(place, 0, quantity, (1.0, 0.98), fee=FEE, reason=at.WHY_ROLL)
        book.leg(place, 0, -quantity, (1.4, 1.42), (spots[symbol], "2011-03-18"), FEE, at.WHY_ROLL)
    elif fate < 0.5:
        _end(dice, book, place, spots[symbol])


def _end(dice: random.Random, book: Builder, place: int, spot: float) -> None:
    held = book.held[place]
    way = dice.choice(["called", "put", "cut"])
    if way == "cut":
        reason = at.WHY_EXIT_RULE + dice.randint(0, 1)
        book.leg(place, 0, -held[0], (0.6, 0.59), fee=FEE, reason=reason)
        book.leg(place, 1, -held[1], (0.3, 0.31), fee=FEE, reason=reason)
        book.shares(place, -held[at.SHARES_ROW], round(spot - 0.01, 2), spot, FEE, reason)
        book.close(place, reason)
        return
    ending, other = (0, 1) if way == "called" else (1, 0)
    book.expired(place, other, spot)
    book.delivered(place, ending, spot, FEE)
    book.close(place)
