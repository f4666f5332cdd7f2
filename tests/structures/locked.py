"""Structures whose result is locked in or bounded: conversion, reversal, spreads, secured puts."""

from __future__ import annotations

from structures.hand_case import Structure

SPREAD = "01-19 01-22 01-26 02-02 02-09 02-16 03-01 03-07 03-08 03-11"
COSTS = {
    "half_spread": 0.02,
    "contract_fee": 0.65,
    "assignment_fee": 5.0,
    "trade_fee": 1.0,
    "slippage": 0.001,
}

STRUCTURES = (
    Structure(
        "conversion",
        "conversion",
        """
        0 close entry ordered 2
        1 open entry opened 2
        1 open entry shares +200
        1 open entry call -200 50 02-16
        1 open entry put +200 50 02-16
        """,
        {
            "still": """
            9 close expiry call expired
            9 close expiry put expired
            9 close expiry shares -200
            9 close expiry over +0.00
            9 close entry ordered 2
            """,
            "rising": """
            9 close expiry call assigned
            9 close expiry shares -200 50
            9 close expiry put expired
            9 close expiry over +0.00
            9 close entry ordered 2
            """,
            "falling": """
            9 close expiry call expired
            9 close expiry put exercised
            9 close expiry shares -200 50
            9 close expiry over +0.00
            9 close entry ordered 2
            """,
            "gapping": """
            9 close expiry call expired
            9 close expiry put exercised
            9 close expiry shares -200 50
            9 close expiry over +0.00
            9 close entry ordered 2
            """,
        },
    ),
    Structure(
        "reversal",
        "reversal",
        """
        0 close entry ordered 2
        1 open entry opened 2
        1 open entry shares -200
        1 open entry call +200 50 02-16
        1 open entry put -200 50 02-16
        """,
        {
            "still": """
            9 close expiry call expired
            9 close expiry put expired
            9 close expiry shares +200
            9 close expiry over +0.00
            9 close entry ordered 2
            """,
            "rising": """
            9 close expiry call exercised
            9 close expiry shares +200 50
            9 close expiry put expired
            9 close expiry over +0.00
            9 close entry ordered 2
            """,
            "falling": """
            9 close expiry call expired
            9 close expiry put assigned
            9 close expiry shares +200 50
            9 close expiry over +0.00
            9 close entry ordered 2
            """,
            "gapping": """
            9 close expiry call expired
            9 close expiry put assigned
            9 close expiry shares +200 50
            9 close expiry over +0.00
            9 close entry ordered 2
            """,
        },
    ),
    Structure(
        "reversal with borrowed shares and a dividend",
        "reversal",
        """
        0 close entry ordered 2
        1 open entry opened 2
        1 open entry shares -200
        1 open entry call +200 50 02-16
        1 open entry put -200 50 02-16
        2 night none borrow
        3 night none borrow
        4 night none borrow
        4 night none dividend 0.5
        5 night none borrow
        6 night none borrow
        7 night none borrow
        8 night none borrow
        9 night none borrow
        """,
        {
            "rising": """
            9 close expiry call exercised
            9 close expiry shares +200 50
            9 close expiry put expired
            9 close expiry over -114.20
            9 close entry ordered 2
            """,
            "falling": """
            9 close expiry call expired
            9 close expiry put assigned
            9 close expiry shares +200 50
            9 close expiry over -113.19
            9 close entry ordered 2
            """,
        },
        {"columns": {"dividend": {4: 0.5}}, "costs": {"borrow": 0.02}},
    ),
    Structure(
        "conversion with costs",
        "conversion",
        """
        0 close entry ordered 2
        1 open entry opened 2
        1 open entry shares +200
        1 open entry call -200 50 02-16
        1 open entry put +200 50 02-16
        """,
        {
            "rising": """
            9 close expiry call assigned
            9 close expiry shares -200 50
            9 close expiry put expired
            9 close expiry over -31.19
            9 close entry ordered 2
            """,
            "falling": """
            9 close expiry call expired
            9 close expiry put exercised
            9 close expiry shares -200 50
            9 close expiry over -31.19
            9 close entry ordered 2
            """,
        },
        {"costs": COSTS},
    ),
    Structure(
        "conversion with a dividend",
        "conversion",
        """
        0 close entry ordered 2
        1 open entry opened 2
        1 open entry shares +200
        1 open entry call -200 50 02-16
        1 open entry put +200 50 02-16
        4 night none dividend 0.5
        9 close expiry call expired
        9 close expiry put expired
        9 close expiry shares -200
        9 close expiry over +100.00
        9 close entry ordered 2
        """,
        {
            "still": """
            """,
        },
        {"columns": {"dividend": {4: 0.5}}},
    ),
    Structure(
        "conversion through a split",
        "conversion",
        """
        0 close entry ordered 2
        1 open entry opened 2
        1 open entry shares +200
        1 open entry call -200 50 02-16
        1 open entry put +200 50 02-16
        5 night none split 2
        9 close expiry call expired
        9 close expiry put expired
        9 close expiry shares -400
        9 close expiry over +0.00
        9 close entry ordered 4
        """,
        {"split in two": ""},
        {"columns": {"split": {5: 2.0}}},
    ),
    Structure(
        "cash-secured put",
        "cash-secured-put",
        """
        0 close entry ordered 2
        1 open entry opened 2
        1 open entry put -200 48 02-16
        """,
        {
            "still": """
            9 close expiry put expired
            9 close expiry over +148.87
            9 close entry ordered 2
            """,
            "rising": """
            9 close expiry put expired
            9 close expiry over +148.87
            9 close entry ordered 2
            """,
            "falling": """
            9 close expiry put assigned
            9 close expiry shares +200 48
            9 close expiry shares -200
            9 close expiry over -251.13
            9 close entry ordered 2
            """,
            "gapping": """
            9 close expiry put assigned
            9 close expiry shares +200 48
            9 close expiry shares -200
            9 close expiry over -851.13
            9 close entry ordered 2
            """,
        },
    ),
    Structure(
        "cash-secured put with costs",
        "cash-secured-put",
        """
        0 close entry ordered 2
        1 open entry opened 2
        1 open entry put -200 48 02-16
        9 close expiry put assigned
        9 close expiry shares +200 48
        9 close expiry shares -200
        9 close expiry over -270.61
        9 close entry ordered 2
        """,
        {
            "falling": """
            """,
        },
        {"costs": COSTS},
    ),
    Structure(
        "call debit spread",
        "call-debit-spread",
        """
        0 close entry ordered 2
        1 open entry opened 2
        1 open entry low-call +200 47 02-16
        1 open entry high-call -200 51 02-16
        """,
        {
            "still": """
            9 close expiry low-call exercised
            9 close expiry shares +200 47
            9 close expiry high-call expired
            9 close expiry shares -200
            9 close expiry over +133.33
            9 close entry ordered 3
            """,
            "rising": """
            9 close expiry low-call exercised
            9 close expiry shares +200 47
            9 close expiry high-call assigned
            9 close expiry shares -200 51
            9 close expiry over +333.33
            9 close entry ordered 3
            """,
            "falling": """
            9 close expiry low-call expired
            9 close expiry high-call expired
            9 close expiry over -466.67
            9 close no-lot declined 1
            """,
            "gapping": """
            9 close expiry low-call expired
            9 close expiry high-call expired
            9 close expiry over -466.67
            9 close no-lot declined 1
            """,
        },
        {"cash": 600.0},
    ),
    Structure(
        "put credit spread",
        "put-credit-spread",
        """
        0 close entry ordered 2
        1 open entry opened 2
        1 open entry put -200 47 03-15
        1 open entry low-put +200 44 03-15
        """,
        {
            "still": """
            6 close half-won leaving
            7 open half-won put +200 47 03-15
            7 open half-won low-put -200 44 03-15
            7 open half-won over +117.92
            7 close entry ordered 3
            8 open entry opened 3
            8 open entry put -300 48 04-19
            8 open entry low-put +300 45 04-19
            """,
            "rising": """
            4 close half-won leaving
            5 open half-won put +200 47 03-15
            5 open half-won low-put -200 44 03-15
            5 open half-won over +87.01
            5 close entry ordered 2
            6 open entry opened 2
            6 open entry put -200 50 03-15
            6 open entry low-put +200 47 03-15
            7 close half-won leaving
            8 open half-won put +200 50 03-15
            8 open half-won low-put -200 47 03-15
            8 open half-won over +65.07
            8 close entry ordered 3
            9 open entry opened 3
            9 open entry put -300 51 04-19
            9 open entry low-put +300 48 04-19
            """,
            "falling": """
            8 close last-week leaving
            9 open last-week put +200 47 03-15
            9 open last-week low-put -200 44 03-15
            9 open last-week over -37.46
            9 close entry ordered 2
            """,
            "gapping": """
            4 close half-lost leaving
            5 open half-lost put +200 47 03-15
            5 open half-lost low-put -200 44 03-15
            5 open half-lost over -265.05
            5 close entry ordered 2
            6 open entry opened 1
            6 open entry put -100 42 03-15
            6 open entry low-put +100 40 03-15
            8 close last-week leaving
            9 open last-week put +100 42 03-15
            9 open last-week low-put -100 40 03-15
            9 open last-week over +7.55
            9 close entry ordered 2
            """,
        },
        {"days": SPREAD, "cash": 600.0},
    ),
    Structure(
        "reversal with costs",
        "reversal",
        """
        0 close entry ordered 2
        1 open entry opened 2
        1 open entry shares -200
        1 open entry call +200 50 02-16
        1 open entry put -200 50 02-16
        2 night none borrow
        3 night none borrow
        4 night none borrow
        5 night none borrow
        6 night none borrow
        7 night none borrow
        8 night none borrow
        9 night none borrow
        9 close expiry call expired
        9 close expiry put assigned
        9 close expiry shares +200 50
        9 close expiry over -43.75
        9 close entry ordered 2
        """,
        {
            "gapping": """
            """,
        },
        {"costs": COSTS | {"borrow": 0.02}},
    ),
)
