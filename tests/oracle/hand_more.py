"""Costs, dividends, splits, early exercise, interest, rolling, exits and stops, worked out by hand."""

from __future__ import annotations

from oracle.by_hand import (
    CASH_PUT,
    COLLAR,
    COSTS,
    COVERED_CALL,
    CRASHING,
    DEEP,
    FALLING,
    GAPPING,
    MONDAY,
    NAN,
    RISING,
    STILL,
    STOP,
    TOUCHING,
    TWO_MONTHS,
    WEEKLY_CASH_PUT,
    Case,
    at,
)

CASES = (
    Case(
        "covered call, costs, rising",
        COVERED_CALL,
        {"close": RISING},
        """
        1 entry: 2 lots opened
        1 entry: shares +200 at 50.0500 = -10011.00
        1 entry: call -200 at 0.5600 = +110.70
        8 expiry: call assigned, -5.00
        8 expiry: shares -200 at 51.0000 = +10200.00
        8 expiry: over, +294.70
        """,
        12294.70,
        COSTS,
    ),
    Case(
        "collar, costs, gapping through its stop",
        COLLAR | STOP,
        GAPPING,
        """
        1 entry: 2 lots opened
        1 entry: shares +200 at 50.0500 = -10011.00
        1 entry: call -200 at 0.5600 = +110.70
        1 entry: put +200 at 0.3100 = -63.30
        5 stop gap: call +200 at 0.0100 = -3.30
        5 stop gap: put -200 at 3.6000 = +718.70
        5 stop gap: shares -200 at 44.2058 = +8840.15
        5 stop gap: over, -408.05
        """,
        11591.95,
        COSTS,
    ),
    Case(
        "covered call, dividend and split",
        COVERED_CALL,
        {"close": [50] * 5 + [25] * 5, "dividend": at(3, 0.5), "split": at(5, 2, 1)},
        """
        1 entry: 2 lots opened
        1 entry: shares +200 at 50.0000 = -10000.00
        1 entry: call -200 at 0.5912 = +118.25
        3 none: dividend +200 at 0.5000 = +100.00
        5 none: split
        8 expiry: call expired, +0.00
        8 expiry: shares -400 at 25.0000 = +10000.00
        8 expiry: over, +218.25
        """,
        12218.25,
    ),
    Case(
        "collar, called early before a dividend",
        COLLAR | {"legs": COLLAR["legs"] | {"call": DEEP}},
        {"close": STILL, "dividend": at(3, 1.0)},
        """
        1 entry: 2 lots opened
        1 entry: shares +200 at 50.0000 = -10000.00
        1 entry: call -200 at 5.0157 = +1003.14
        1 entry: put +200 at 0.2905 = -58.10
        3 assigned early: call assigned, +0.00
        3 assigned early: shares -200 at 45.0000 = +9000.00
        3 left over: put -200 at 0.2206 = +44.11
        3 left over: over, -10.85
        """,
        11989.15,
    ),
    Case(
        "covered call, interest",
        COVERED_CALL,
        {"close": STILL, "rate": 0.05},
        """
        1 interest +1.64
        1 entry: 2 lots opened
        1 entry: shares +200 at 50.0000 = -10000.00
        1 entry: call -200 at 0.6158 = +123.16
        2 interest +0.29
        3 interest +0.29
        4 interest +0.29
        5 interest +1.17
        6 interest +0.29
        7 interest +0.29
        8 interest +0.29
        8 expiry: call expired, +0.00
        8 expiry: shares -200 at 50.0000 = +10000.00
        8 expiry: over, +123.16
        9 interest +4.99
        """,
        12132.70,
    ),
    Case(
        "cash-secured put, falling",
        CASH_PUT,
        {"close": FALLING},
        """
        1 entry: 2 lots opened
        1 entry: put -200 at 0.5727 = +114.53
        8 expiry: put assigned, +0.00
        8 expiry: shares +200 at 49.0000 = -9800.00
        8 expiry: shares -200 at 46.5000 = +9300.00
        8 expiry: over, -385.47
        """,
        11614.53,
    ),
    Case(
        "collar on an index, rising",
        COLLAR,
        {"close": RISING, "kinds": {"HILL": "index"}},
        """
        1 entry: 2 lots opened
        1 entry: shares +200 at 50.0000 = -10000.00
        1 entry: call -200 at 0.5912 = +118.25
        1 entry: put +200 at 0.2905 = -58.10
        8 expiry: call assigned, -500.00
        8 expiry: put expired, +0.00
        8 expiry: shares -200 at 53.5000 = +10700.00
        8 expiry: over, +260.15
        """,
        12260.15,
    ),
    Case(
        "weekly call over a put, still",
        TWO_MONTHS,
        {"close": STILL},
        """
        1 entry: 2 lots opened
        1 entry: shares +200 at 50.0000 = -10000.00
        1 entry: call -200 at 0.2058 = +41.17
        1 entry: put +200 at 0.2905 = -58.10
        4 expiry: call expired, +0.00
        4 roll: signalled call
        5 roll: call -200 at 0.2058 = +41.17
        8 expiry: call expired, +0.00
        8 expiry: put expired, +0.00
        8 roll: signalled call
        9 roll: call -200 at 0.2718 = +54.36
        """,
        12027.71,
    ),
    Case(
        "weekly call over a put, rising",
        TWO_MONTHS,
        {"close": RISING},
        """
        1 entry: 2 lots opened
        1 entry: shares +200 at 50.0000 = -10000.00
        1 entry: call -200 at 0.2058 = +41.17
        1 entry: put +200 at 0.2905 = -58.10
        4 expiry: call assigned, +0.00
        4 expiry: shares -200 at 51.0000 = +10200.00
        5 left over: put -200 at 0.0010 = +0.20
        5 left over: over, +183.27
        """,
        12183.27,
    ),
    Case(
        "collar, cut at a loss of 1 %",
        COLLAR | {"exit": [{"name": "cut", "if": {"loss": {"at_least": "1%"}}}]},
        {"close": FALLING},
        """
        1 entry: 2 lots opened
        1 entry: shares +200 at 50.0000 = -10000.00
        1 entry: call -200 at 0.5912 = +118.25
        1 entry: put +200 at 0.2905 = -58.10
        4 exit rule: signalled
        5 exit rule: call +200 at 0.0083 = -1.65
        5 exit rule: put -200 at 0.5438 = +108.76
        5 exit rule: shares -200 at 48.0000 = +9600.00
        5 exit rule: over, -232.74
        """,
        11767.26,
    ),
    Case(
        "covered call, taken at a gain of 1.5 %, at the close",
        COVERED_CALL | {"fill": "close", "exit": [{"name": "gain", "if": {"gain": {"at_least": "1.5%"}}}]},
        {"close": RISING},
        """
        0 entry: 2 lots opened
        0 entry: shares +200 at 50.0000 = -10000.00
        0 entry: call -200 at 0.6240 = +124.81
        4 exit rule: signalled
        4 exit rule: call +200 at 1.1227 = -224.54
        4 exit rule: shares -200 at 51.5000 = +10300.00
        4 exit rule: over, +200.27
        9 entry: 2 lots opened
        9 entry: shares +200 at 54.0000 = -10800.00
        9 entry: call -200 at 0.5412 = +108.25
        """,
        12200.27,
    ),
    Case(
        "collar, history ends",
        COLLAR,
        {"close": [50] * 4 + [47] + [NAN] * 5},
        """
        1 entry: 2 lots opened
        1 entry: shares +200 at 50.0000 = -10000.00
        1 entry: call -200 at 0.5912 = +118.25
        1 entry: put +200 at 0.2905 = -58.10
        9 gone: gone
        9 gone: call expired, +0.00
        9 gone: put exercised, +200.00
        9 gone: shares -200 at 47.0000 = +9400.00
        9 gone: over, -339.85
        """,
        11660.15,
    ),
    Case(
        "shares alone, stop reached",
        {"name": "Shares", "enter": MONDAY} | STOP,
        TOUCHING,
        """
        1 entry: 2 lots opened
        1 entry: shares +200 at 50.0000 = -10000.00
        5 stop: shares -200 at 46.5000 = +9300.00
        5 stop: over, -700.00
        """,
        11300.00,
    ),
    Case(
        "covered call, stop reached",
        COVERED_CALL | STOP,
        TOUCHING,
        """
        1 entry: 2 lots opened
        1 entry: shares +200 at 50.0000 = -10000.00
        1 entry: call -200 at 0.5912 = +118.25
        5 stop: call +200 at 0.0002 = -0.04
        5 stop: shares -200 at 46.5000 = +9300.00
        5 stop: over, -581.79
        """,
        11418.21,
    ),
    Case(
        "cash-secured put, assigned early when deep in the money",
        CASH_PUT,
        {"close": CRASHING, "rate": at(5, 0.1)},
        """
        1 entry: 2 lots opened
        1 entry: put -200 at 0.5727 = +114.53
        6 interest +0.63
        6 interest +2.69
        6 assigned early: put assigned, +0.00
        6 assigned early: shares +200 at 49.0000 = -9800.00
        6 expiry: shares -200 at 41.0000 = +8200.00
        6 expiry: over, -1482.78
        """,
        10517.85,
    ),
    Case(
        "weekly cash-secured put, written again across a split",
        WEEKLY_CASH_PUT,
        {"close": [50] * 2 + [25] * 8, "split": at(2, 2, 1)},
        """
        1 entry: 2 lots opened
        1 entry: put -200 at 0.1970 = +39.40
        2 none: split
        4 expiry: put expired, +0.00
        4 roll: signalled put
        5 roll: put -400 at 0.0985 = +39.40
        8 expiry: put expired, +0.00
        8 roll: signalled put
        9 roll: put -400 at 0.1306 = +52.22
        """,
        12082.18,
    ),
    Case(
        "weekly cash-secured put, not written again after delivery",
        WEEKLY_CASH_PUT,
        {"close": [50, 50, 48, 48, 48, 47, 47, 47, 46, 46]},
        """
        1 entry: 2 lots opened
        1 entry: put -200 at 0.1970 = +39.40
        4 expiry: put assigned, +0.00
        4 expiry: shares +200 at 49.0000 = -9800.00
        4 expiry: shares -200 at 48.0000 = +9600.00
        4 expiry: over, -160.60
        """,
        11839.40,
    ),
    Case(
        "covered call over half the shares, called early",
        COVERED_CALL | {"legs": {"call": DEEP | {"ratio": 0.5}}},
        {"close": STILL, "dividend": at(3, 1.0)},
        """
        1 entry: 2 lots opened
        1 entry: shares +200 at 50.0000 = -10000.00
        1 entry: call -100 at 5.0157 = +501.57
        3 assigned early: call assigned, +0.00
        3 assigned early: shares -100 at 45.0000 = +4500.00
        3 none: dividend +100 at 1.0000 = +100.00
        3 expiry: shares -100 at 50.0000 = +5000.00
        3 expiry: over, +101.57
        """,
        12101.57,
    ),
    Case(
        "covered call, volatility no longer quoted",
        COVERED_CALL | {"exit": [{"name": "time", "if": {"held": {"at_least": 5}}}]},
        {"close": STILL, "implied": [0.3] + [NAN] * 9},
        """
        1 entry: 2 lots opened
        1 entry: shares +200 at 50.0000 = -10000.00
        1 entry: call -200 at 0.5912 = +118.25
        6 exit rule: signalled
        7 exit rule: call +200 at 0.0591 = -11.82
        7 exit rule: shares -200 at 50.0000 = +10000.00
        7 exit rule: over, +106.43
        9 no volatility: declined
        """,
        12106.43,
    ),
)
