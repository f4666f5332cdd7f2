"""Structures with a put of their own: married, rolled, laddered, with income, put-spread collar."""

from __future__ import annotations

from structures.hand_case import Structure

HALF_YEAR = "01-19 01-22 02-16 03-15 04-19 05-17 06-07 06-21 07-05 07-19"
ROLLS = "01-19 01-22 02-02 02-16 03-01 03-20 03-21 04-05 04-19 05-17"
LADDER = "01-19 01-22 02-02 02-16 03-15 04-12 04-15 04-19 05-10 05-17"
INCOME = "01-19 01-22 02-02 02-16 03-13 03-15 04-17 04-18 06-07 06-10"
QUARTER_DAYS = "03-08 03-15 03-18 04-05 04-19 05-03 05-17 06-07 06-20 06-21"
COSTS = {
    "half_spread": 0.02,
    "contract_fee": 0.65,
    "assignment_fee": 5.0,
    "trade_fee": 1.0,
    "slippage": 0.001,
}

STRUCTURES = (
    Structure(
        "married put",
        "married-put",
        """
        0 close entry ordered 2
        1 open entry opened 2
        1 open entry shares +200
        1 open entry put +200 50 07-19
        7 close put-nearly-spent leaving
        8 open put-nearly-spent put -200 50 07-19
        8 open put-nearly-spent shares -200
        """,
        {
            "still": """
            8 open put-nearly-spent over -600.60
            8 close entry ordered 2
            9 open entry opened 2
            9 open entry shares +200
            9 open entry put +200 50 12-20
            """,
            "rising": """
            8 open put-nearly-spent over -184.61
            8 close entry ordered 2
            9 open entry opened 2
            9 open entry shares +200
            9 open entry put +200 54 12-20
            """,
            "falling": """
            8 open put-nearly-spent over -793.12
            8 close entry ordered 2
            9 open entry opened 2
            9 open entry shares +200
            9 open entry put +200 47 12-20
            """,
            "gapping": """
            8 open put-nearly-spent over -836.25
            8 close entry ordered 2
            9 open entry opened 2
            9 open entry shares +200
            9 open entry put +200 43 12-20
            """,
        },
        {"days": HALF_YEAR},
    ),
    Structure(
        "rolling protective put",
        "rolling-protective-put",
        """
        0 close entry ordered 2
        1 open entry opened 2
        1 open entry shares +200
        1 open entry put +200 47 04-19
        """,
        {
            "still": """
            5 close roll put ordered 47 06-21
            6 open roll put -200 47 04-19
            6 open roll put +200 47 06-21
            """,
            "rising": """
            5 close roll put ordered 49 06-21
            6 open roll put -200 47 04-19
            6 open roll put +200 49 06-21
            """,
            "falling": """
            5 close roll put ordered 45 06-21
            6 open roll put -200 47 04-19
            6 open roll put +200 45 06-21
            """,
            "gapping": """
            5 close roll put ordered 41 06-21
            6 open roll put -200 47 04-19
            6 open roll put +200 41 06-21
            """,
        },
        {"days": ROLLS},
    ),
    Structure(
        "laddered hedge",
        "laddered-hedge",
        """
        0 close entry ordered 2
        1 open entry opened 2 #0
        1 open entry shares +200 #0
        1 open entry put +200 47 04-19 #0
        2 close entry ordered 2
        3 open entry opened 2 #1
        3 open entry shares +200 #1
        3 open entry put +200 47 04-19 #1
        4 close entry ordered 2
        5 open entry opened 2 #2
        5 open entry shares +200 #2
        """,
        {
            "rising": """
            5 open entry put +200 48 06-21 #2
            5 close roll put ordered 49 07-19 #0
            5 close roll put ordered 49 07-19 #1
            6 open roll put -200 47 04-19 #0
            6 open roll put +200 49 07-19 #0
            6 open roll put -200 47 04-19 #1
            6 open roll put +200 49 07-19 #1
            """,
            "gapping": """
            5 open entry put +200 41 06-21 #2
            5 close roll put ordered 41 07-19 #0
            5 close roll put ordered 41 07-19 #1
            6 open roll put -200 47 04-19 #0
            6 open roll put +200 41 07-19 #0
            6 open roll put -200 47 04-19 #1
            6 open roll put +200 41 07-19 #1
            """,
        },
        {"days": LADDER, "changes": {"enter.ladder.spacing": 2}, "cash": 36000.0},
    ),
    Structure(
        "married put with income",
        "married-put-with-income",
        """
        0 close entry ordered 2
        1 open entry opened 2
        1 open entry shares +200
        1 open entry put +200 50 07-19
        """,
        {
            "still": """
            8 close roll put ordered 50 12-20
            9 open roll put -200 50 07-19
            9 open roll put +200 50 12-20
            """,
            "rising": """
            6 close added call ordered 56 05-17
            7 open added call -200 56 05-17
            8 close expiry call expired
            8 close roll put ordered 54 12-20
            8 close roll call ordered 57 07-19
            9 open roll put -200 50 07-19
            9 open roll put +200 54 12-20
            9 open roll call -200 57 07-19
            """,
            "falling": """
            8 close roll put ordered 47 12-20
            9 open roll put -200 50 07-19
            9 open roll put +200 47 12-20
            """,
            "gapping": """
            8 close roll put ordered 43 12-20
            9 open roll put -200 50 07-19
            9 open roll put +200 43 12-20
            """,
            "leaping": """
            4 close roll put ordered 56 09-20
            4 close added call ordered 60 04-19
            5 open roll put -200 50 07-19
            5 open roll put +200 56 09-20
            5 open added call -200 60 04-19
            6 close roll call ordered 60 05-17
            7 open roll call +200 60 04-19
            7 open roll call -200 60 05-17
            8 close expiry call expired
            8 close roll call ordered 61 07-19
            9 open roll call -200 61 07-19
            """,
        },
        {"days": INCOME},
    ),
    Structure(
        "married put with income and costs",
        "married-put-with-income",
        """
        0 close entry ordered 2
        1 open entry opened 2
        1 open entry shares +200
        1 open entry put +200 50 07-19
        4 close roll put ordered 56 09-20
        4 close added call ordered 60 04-19
        5 open roll put -200 50 07-19
        5 open roll put +200 56 09-20
        5 open added call -200 60 04-19
        6 close roll call ordered 60 05-17
        7 open roll call +200 60 04-19
        7 open roll call -200 60 05-17
        8 close expiry call expired
        8 close roll call ordered 61 07-19
        9 open roll call -200 61 07-19
        """,
        {
            "leaping": """
            """,
        },
        {"days": INCOME, "costs": COSTS},
    ),
    Structure(
        "put-spread collar",
        "put-spread-collar",
        """
        1 close entry opened 2
        1 close entry shares +200
        1 close entry put +200 47 06-21
        1 close entry low-put -200 40 06-21
        1 close entry call -200 53 06-21
        """,
        {
            "still": """
            9 close expiry put expired
            9 close expiry low-put expired
            9 close expiry call expired
            9 close expiry shares -200
            9 close expiry over +81.53
            9 close entry opened 2
            9 close entry shares +200
            9 close entry put +200 47 09-20
            9 close entry low-put -200 40 09-20
            9 close entry call -200 53 09-20
            """,
            "rising": """
            9 close expiry put expired
            9 close expiry low-put expired
            9 close expiry call assigned
            9 close expiry shares -200 53
            9 close expiry over +681.53
            9 close entry opened 2
            9 close entry shares +200
            9 close entry put +200 51 09-20
            9 close entry low-put -200 43 09-20
            9 close entry call -200 57 09-20
            """,
            "falling": """
            9 close expiry put exercised
            9 close expiry shares -200 47
            9 close expiry low-put expired
            9 close expiry call expired
            9 close expiry over -518.47
            9 close entry opened 2
            9 close entry shares +200
            9 close entry put +200 43 09-20
            9 close entry low-put -200 36 09-20
            9 close entry call -200 49 09-20
            """,
            "gapping": """
            9 close expiry put exercised
            9 close expiry shares -200 47
            9 close expiry low-put expired
            9 close expiry call expired
            9 close expiry over -518.47
            9 close entry opened 2
            9 close entry shares +200
            9 close entry put +200 40 09-20
            9 close entry low-put -200 34 09-20
            9 close entry call -200 46 09-20
            """,
        },
        {"days": QUARTER_DAYS},
    ),
    Structure(
        "put-spread collar with costs",
        "put-spread-collar",
        """
        1 close entry opened 2
        1 close entry shares +200
        1 close entry put +200 47 06-21
        1 close entry low-put -200 40 06-21
        1 close entry call -200 53 06-21
        9 close expiry put exercised
        9 close expiry shares -200 47
        9 close expiry low-put expired
        9 close expiry call expired
        9 close expiry over -553.91
        9 close entry opened 2
        9 close entry shares +200
        9 close entry put +200 43 09-20
        9 close entry low-put -200 36 09-20
        9 close entry call -200 49 09-20
        """,
        {
            "falling": """
            """,
        },
        {"days": QUARTER_DAYS, "costs": COSTS},
    ),
)
