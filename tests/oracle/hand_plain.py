"""Covered call, collar and married put in markets that stand still, rise, fall and gap, without costs."""

from __future__ import annotations

from oracle.by_hand import COLLAR, COVERED_CALL, FALLING, GAPPING, MARRIED_PUT, RISING, STILL, STOP, Case

CASES = (
    Case(
        "covered call, still",
        COVERED_CALL,
        {"close": STILL},
        """
        1 entry: 2 lots opened
        1 entry: shares +200 at 50.0000 = -10000.00
        1 entry: call -200 at 0.5912 = +118.25
        8 expiry: call expired, +0.00
        8 expiry: shares -200 at 50.0000 = +10000.00
        8 expiry: over, +118.25
        """,
        12118.25,
    ),
    Case(
        "covered call, rising",
        COVERED_CALL,
        {"close": RISING},
        """
        1 entry: 2 lots opened
        1 entry: shares +200 at 50.0000 = -10000.00
        1 entry: call -200 at 0.5912 = +118.25
        8 expiry: call assigned, +0.00
        8 expiry: shares -200 at 51.0000 = +10200.00
        8 expiry: over, +318.25
        """,
        12318.25,
    ),
    Case(
        "covered call, falling",
        COVERED_CALL,
        {"close": FALLING},
        """
        1 entry: 2 lots opened
        1 entry: shares +200 at 50.0000 = -10000.00
        1 entry: call -200 at 0.5912 = +118.25
        8 expiry: call expired, +0.00
        8 expiry: shares -200 at 46.5000 = +9300.00
        8 expiry: over, -581.75
        """,
        11418.25,
    ),
    Case(
        "covered call, gapping through its stop",
        COVERED_CALL | STOP,
        GAPPING,
        """
        1 entry: 2 lots opened
        1 entry: shares +200 at 50.0000 = -10000.00
        1 entry: call -200 at 0.5912 = +118.25
        5 stop gap: call +200 at 0.0000 = +0.00
        5 stop gap: shares -200 at 44.2500 = +8850.00
        5 stop gap: over, -1031.75
        """,
        10968.25,
    ),
    Case(
        "covered call, gapping",
        COVERED_CALL,
        GAPPING,
        """
        1 entry: 2 lots opened
        1 entry: shares +200 at 50.0000 = -10000.00
        1 entry: call -200 at 0.5912 = +118.25
        8 expiry: call expired, +0.00
        8 expiry: shares -200 at 43.0000 = +8600.00
        8 expiry: over, -1281.75
        """,
        10718.25,
    ),
    Case(
        "collar, still",
        COLLAR,
        {"close": STILL},
        """
        1 entry: 2 lots opened
        1 entry: shares +200 at 50.0000 = -10000.00
        1 entry: call -200 at 0.5912 = +118.25
        1 entry: put +200 at 0.2905 = -58.10
        8 expiry: call expired, +0.00
        8 expiry: put expired, +0.00
        8 expiry: shares -200 at 50.0000 = +10000.00
        8 expiry: over, +60.15
        """,
        12060.15,
    ),
    Case(
        "collar, rising",
        COLLAR,
        {"close": RISING},
        """
        1 entry: 2 lots opened
        1 entry: shares +200 at 50.0000 = -10000.00
        1 entry: call -200 at 0.5912 = +118.25
        1 entry: put +200 at 0.2905 = -58.10
        8 expiry: call assigned, +0.00
        8 expiry: shares -200 at 51.0000 = +10200.00
        8 expiry: put expired, +0.00
        8 expiry: over, +260.15
        """,
        12260.15,
    ),
    Case(
        "collar, falling",
        COLLAR,
        {"close": FALLING},
        """
        1 entry: 2 lots opened
        1 entry: shares +200 at 50.0000 = -10000.00
        1 entry: call -200 at 0.5912 = +118.25
        1 entry: put +200 at 0.2905 = -58.10
        8 expiry: call expired, +0.00
        8 expiry: put exercised, +0.00
        8 expiry: shares -200 at 48.0000 = +9600.00
        8 expiry: over, -339.85
        """,
        11660.15,
    ),
    Case(
        "collar, gapping through its stop",
        COLLAR | STOP,
        GAPPING,
        """
        1 entry: 2 lots opened
        1 entry: shares +200 at 50.0000 = -10000.00
        1 entry: call -200 at 0.5912 = +118.25
        1 entry: put +200 at 0.2905 = -58.10
        5 stop gap: call +200 at 0.0000 = +0.00
        5 stop gap: put -200 at 3.7508 = +750.16
        5 stop gap: shares -200 at 44.2500 = +8850.00
        5 stop gap: over, -339.69
        """,
        11660.31,
    ),
    Case(
        "collar, gapping",
        COLLAR,
        GAPPING,
        """
        1 entry: 2 lots opened
        1 entry: shares +200 at 50.0000 = -10000.00
        1 entry: call -200 at 0.5912 = +118.25
        1 entry: put +200 at 0.2905 = -58.10
        8 expiry: call expired, +0.00
        8 expiry: put exercised, +0.00
        8 expiry: shares -200 at 48.0000 = +9600.00
        8 expiry: over, -339.85
        """,
        11660.15,
    ),
    Case(
        "married put, still",
        MARRIED_PUT,
        {"close": STILL},
        """
        1 entry: 2 lots opened
        1 entry: shares +200 at 50.0000 = -10000.00
        1 entry: put +200 at 0.2905 = -58.10
        8 expiry: put expired, +0.00
        8 expiry: shares -200 at 50.0000 = +10000.00
        8 expiry: over, -58.10
        """,
        11941.90,
    ),
    Case(
        "married put, rising",
        MARRIED_PUT,
        {"close": RISING},
        """
        1 entry: 2 lots opened
        1 entry: shares +200 at 50.0000 = -10000.00
        1 entry: put +200 at 0.2905 = -58.10
        8 expiry: put expired, +0.00
        8 expiry: shares -200 at 53.5000 = +10700.00
        8 expiry: over, +641.90
        """,
        12641.90,
    ),
    Case(
        "married put, falling",
        MARRIED_PUT,
        {"close": FALLING},
        """
        1 entry: 2 lots opened
        1 entry: shares +200 at 50.0000 = -10000.00
        1 entry: put +200 at 0.2905 = -58.10
        8 expiry: put exercised, +0.00
        8 expiry: shares -200 at 48.0000 = +9600.00
        8 expiry: over, -458.10
        """,
        11541.90,
    ),
    Case(
        "married put, gapping through its stop",
        MARRIED_PUT | STOP,
        GAPPING,
        """
        1 entry: 2 lots opened
        1 entry: shares +200 at 50.0000 = -10000.00
        1 entry: put +200 at 0.2905 = -58.10
        5 stop gap: put -200 at 3.7508 = +750.16
        5 stop gap: shares -200 at 44.2500 = +8850.00
        5 stop gap: over, -457.94
        """,
        11542.06,
    ),
    Case(
        "married put, gapping",
        MARRIED_PUT,
        GAPPING,
        """
        1 entry: 2 lots opened
        1 entry: shares +200 at 50.0000 = -10000.00
        1 entry: put +200 at 0.2905 = -58.10
        8 expiry: put exercised, +0.00
        8 expiry: shares -200 at 48.0000 = +9600.00
        8 expiry: over, -458.10
        """,
        11541.90,
    ),
)
