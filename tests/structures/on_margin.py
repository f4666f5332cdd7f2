"""Structures in a margin account: lots by the regulation's table, maintenance calls, and loans.

Half of 50.00 a share is enough to buy: 12,000 are four lots. A loan costs 1.5 % over the rate on cash, which
is none here.
"""

from __future__ import annotations

from structures.hand_case import Structure

SPREAD = "01-19 01-22 01-26 02-02 02-09 02-16 03-01 03-07 03-08 03-11"

STRUCTURES = (
    Structure(
        "shares alone on margin",
        "shares-alone",
        """
        0 close entry ordered 4
        1 open entry opened 4
        1 open entry shares +400
        2 night none interest
        3 night none interest
        4 night none interest
        """,
        {
            "still": """
            5 night none interest
            6 night none interest
            7 night none interest
            8 night none interest
            9 night none interest
            """,
            # 25 % of 400 shares at 26 are 2,600; about 2,400 are left of the 12,000
            "collapsing": """
            4 close margin called 2600
            5 night none interest
            5 open margin shares -400
            5 open margin over -9600.00
            5 close entry ordered 1
            6 open entry opened 1
            6 open entry shares +100
            7 night none interest
            8 night none interest
            9 night none interest
            """,
        },
        {"margin": "regulation"},
    ),
    Structure(
        "conversion on margin",
        "conversion",
        """
        0 close entry ordered 4
        1 open entry opened 4
        1 open entry shares +400
        1 open entry call -400 50 02-16
        1 open entry put +400 50 02-16
        2 night none interest
        3 night none interest
        4 night none interest
        5 night none interest
        6 night none interest
        7 night none interest
        8 night none interest
        9 night none interest
        9 close expiry call expired
        9 close expiry put exercised
        9 close expiry shares -400 50
        9 close expiry over +0.00
        9 close entry ordered 5
        """,
        {"gapping": ""},
        {"margin": "regulation"},
    ),
    Structure(
        "reversal on margin",
        "reversal",
        """
        0 close entry ordered 4
        1 open entry opened 4
        1 open entry shares -400
        1 open entry call +400 50 02-16
        1 open entry put -400 50 02-16
        9 close expiry call expired
        9 close expiry put assigned
        9 close expiry shares +400 50
        9 close expiry over +0.00
        9 close entry ordered 5
        """,
        {"gapping": ""},
        {"margin": "regulation"},
    ),
    # two lots of 300 less what is received, as in a cash account: a spread asks for what can be lost
    Structure(
        "put credit spread on margin",
        "put-credit-spread",
        """
        0 close entry ordered 2
        1 open entry opened 2
        1 open entry put -200 47 03-15
        1 open entry low-put +200 44 03-15
        8 close last-week leaving
        9 open last-week put +200 47 03-15
        9 open last-week low-put -200 44 03-15
        9 open last-week over -37.46
        9 close entry ordered 2
        """,
        {"falling": ""},
        {"days": SPREAD, "cash": 600.0, "margin": "regulation"},
    ),
    # two lots of 233.33, which is what is paid
    Structure(
        "call debit spread on margin",
        "call-debit-spread",
        """
        0 close entry ordered 2
        1 open entry opened 2
        1 open entry low-call +200 47 02-16
        1 open entry high-call -200 51 02-16
        9 close expiry low-call expired
        9 close expiry high-call expired
        9 close expiry over -466.67
        9 close no-lot declined 1
        """,
        {"falling": ""},
        {"cash": 600.0, "margin": "regulation"},
    ),
    # 20 % of 50 less 2 out of the money are 800 a lot
    Structure(
        "written put on margin",
        "cash-secured-put",
        """
        0 close entry ordered 3
        1 open entry opened 3
        1 open entry put -300 48 02-16
        """,
        {
            "still": """
            9 close expiry put expired
            9 close expiry over +223.31
            9 close entry ordered 4
            """,
            # 20 % of 44 three times; later 20 % of 43 less 2 three times
            "gapping": """
            4 close margin called 2640
            5 open margin put +300 48 02-16
            5 open margin over -1002.52
            5 close entry ordered 3
            6 open entry opened 3
            6 open entry put -300 41 03-15
            7 close margin called 1980
            8 open margin put +300 41 03-15
            8 open margin over -34.59
            8 close entry ordered 2
            9 open entry opened 2
            9 open entry put -200 41 03-15
            """,
            # nothing is left but a debt, which costs interest; nobody calls it, and nothing is entered
            "collapsing": """
            4 close margin called 1560
            5 open margin put +300 48 02-16
            5 open margin over -6376.69
            6 night none interest
            7 night none interest
            8 night none interest
            9 night none interest
            """,
        },
        {"cash": 3000.0, "margin": "regulation"},
    ),
)
