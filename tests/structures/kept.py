"""Legs written again and again: different-month collars, and calls against shares that were assigned."""

from __future__ import annotations

from structures.hand_case import Structure

MONTHS = "01-19 01-22 02-02 02-16 02-20 03-15 03-18 04-19 05-10 05-13"
CALLS = "01-19 01-22 02-02 02-16 02-20 03-01 03-15 03-18 04-19 04-22"

STRUCTURES = (
    Structure(
        "cash-secured put, then calls",
        "cash-secured-put-then-calls",
        """
        0 close entry ordered 2
        1 open entry opened 2
        1 open entry put -200 48 02-16
        3 close expiry put expired
        3 close expiry over +148.87
        3 close entry ordered 2
        4 open entry opened 2
        """,
        {
            "still": """
            4 open entry put -200 48 03-15
            6 close expiry put expired
            6 close expiry over +143.50
            6 close entry ordered 2
            7 open entry opened 2
            7 open entry put -200 47 04-19
            8 close expiry put expired
            8 close expiry over +124.84
            8 close entry ordered 2
            9 open entry opened 2
            9 open entry put -200 48 05-17
            """,
            "rising": """
            4 open entry put -200 48 03-15
            6 close expiry put expired
            6 close expiry over +94.66
            6 close entry ordered 2
            7 open entry opened 2
            7 open entry put -200 50 04-19
            8 close expiry put expired
            8 close expiry over +167.82
            8 close entry ordered 2
            9 open entry opened 2
            9 open entry put -200 51 05-17
            """,
            "falling": """
            4 open entry put -200 47 03-15
            6 close expiry put expired
            6 close expiry over +138.14
            6 close entry ordered 2
            7 open entry opened 2
            7 open entry put -200 45 04-19
            8 close expiry put expired
            8 close expiry over +137.67
            8 close entry ordered 2
            9 open entry opened 2
            9 open entry put -200 44 05-17
            """,
            "gapping": """
            4 open entry put -200 48 03-15
            6 close expiry put assigned
            6 close expiry shares +200 48
            6 close added call ordered 46 04-19
            7 open added call -200 46 04-19
            8 close expiry call expired
            8 close roll call ordered 46 05-17
            9 open roll call -200 46 05-17
            """,
            "leaping": """
            4 open entry put -200 48 03-15
            6 close expiry put expired
            6 close expiry over +6.94
            6 close entry ordered 2
            7 open entry opened 2
            7 open entry put -200 54 04-19
            8 close expiry put expired
            8 close expiry over +192.60
            8 close entry ordered 2
            9 open entry opened 2
            9 open entry put -200 54 05-17
            """,
        },
        {"days": CALLS},
    ),
    Structure(
        "cash-secured put, then calls that are called away",
        "cash-secured-put-then-calls",
        """
        0 close entry ordered 2
        1 open entry opened 2
        1 open entry put -200 48 02-16
        3 close expiry put assigned
        3 close expiry shares +200 48
        3 close added call ordered 49 03-15
        4 open added call -200 49 03-15
        6 close expiry call expired
        6 close roll call ordered 51 04-19
        7 open roll call -200 51 04-19
        8 close expiry call assigned
        8 close expiry shares -200 51
        8 close expiry over +940.61
        8 close entry ordered 2
        9 open entry opened 2
        9 open entry put -200 49 05-17
        """,
        {"recovering": ""},
        {"days": CALLS},
    ),
    Structure(
        "different-month collar",
        "collar-different-month",
        """
        0 close entry ordered 2
        1 open entry opened 2
        1 open entry shares +200
        1 open entry call -200 51 02-16
        1 open entry put +200 48 05-17
        3 close expiry call expired
        """,
        {
            "still": """
            3 close roll call ordered 51 03-15
            4 open roll call -200 51 03-15
            5 close expiry call expired
            5 close roll call ordered 51 04-19
            6 open roll call -200 51 04-19
            7 close expiry call expired
            7 close roll call ordered 51 05-17
            8 open roll call -200 51 05-17
            8 close put-nearly-spent leaving
            9 open put-nearly-spent call +200 51 05-17
            9 open put-nearly-spent put -200 48 05-17
            9 open put-nearly-spent shares -200
            9 open put-nearly-spent over +287.94
            9 close entry ordered 2
            """,
            "rising": """
            3 close roll call ordered 53 03-15
            4 open roll call -200 53 03-15
            5 close expiry call expired
            5 close roll call ordered 54 04-19
            6 open roll call -200 54 04-19
            7 close expiry call expired
            7 close roll call ordered 55 05-17
            8 open roll call -200 55 05-17
            8 close put-nearly-spent leaving
            9 open put-nearly-spent call +200 55 05-17
            9 open put-nearly-spent put -200 48 05-17
            9 open put-nearly-spent shares -200
            9 open put-nearly-spent over +827.25
            9 close entry ordered 2
            """,
            "falling": """
            3 close roll call ordered 50 03-15
            4 open roll call -200 50 03-15
            5 close expiry call expired
            5 close roll call ordered 49 04-19
            6 open roll call -200 49 04-19
            7 close expiry call expired
            7 close roll call ordered 48 05-17
            8 open roll call -200 48 05-17
            8 close put-nearly-spent leaving
            9 open put-nearly-spent call +200 48 05-17
            9 open put-nearly-spent put -200 48 05-17
            9 open put-nearly-spent shares -200
            9 open put-nearly-spent over -102.39
            9 close entry ordered 2
            """,
            "gapping": """
            3 close roll call ordered 51 03-15
            4 open roll call -200 51 03-15
            5 close expiry call expired
            5 close roll call ordered 45 04-19
            6 open roll call -200 45 04-19
            7 close expiry call expired
            7 close roll call ordered 44 05-17
            8 open roll call -200 44 05-17
            8 close put-nearly-spent leaving
            9 open put-nearly-spent call +200 44 05-17
            9 open put-nearly-spent put -200 48 05-17
            9 open put-nearly-spent shares -200
            9 open put-nearly-spent over -387.78
            9 close entry ordered 2
            """,
            "leaping": """
            3 close roll call ordered 51 03-15
            4 open roll call -200 51 03-15
            5 close expiry call assigned
            5 close expiry shares -200 51
            6 open left-over put -200 48 05-17
            6 open left-over over +1055.14
            6 close entry ordered 2
            7 open entry opened 2
            7 open entry shares +200
            7 open entry call -200 58 04-19
            7 open entry put +200 54 07-19
            7 close expiry call expired
            7 close roll call ordered 59 05-17
            8 open roll call -200 59 05-17
            """,
        },
        {"days": MONTHS},
    ),
    Structure(
        "different-month collar, put in the money",
        "collar-different-month-in-the-money",
        """
        0 close entry ordered 2
        1 open entry opened 2
        1 open entry shares +200
        1 open entry put +200 53 05-17
        1 open entry call -200 53 02-16
        3 close expiry call expired
        3 close roll call ordered 53 03-15
        4 open roll call -200 53 03-15
        5 close expiry call expired
        5 close roll call ordered 53 04-19
        6 open roll call -200 53 04-19
        7 close expiry call expired
        7 close roll call ordered 53 05-17
        8 open roll call -200 53 05-17
        8 close put-nearly-spent leaving
        9 open put-nearly-spent put -200 53 05-17
        9 open put-nearly-spent call +200 53 05-17
        9 open put-nearly-spent shares -200
        """,
        {
            "still": """
            9 open put-nearly-spent over -64.26
            9 close entry ordered 2
            """,
            "rising": """
            9 open put-nearly-spent over +293.98
            9 close entry ordered 2
            """,
            "falling": """
            9 open put-nearly-spent over -202.26
            9 close entry ordered 2
            """,
            "gapping": """
            9 open put-nearly-spent over -318.54
            9 close entry ordered 2
            """,
        },
        {"days": MONTHS},
    ),
    Structure(
        "reverse collar, different months",
        "collar-reverse-different-month",
        """
        0 close entry ordered 2
        1 open entry opened 2
        1 open entry shares +200
        1 open entry put +200 52 05-17
        1 open entry call -200 49 02-16
        """,
        {
            "still": """
            3 close expiry call assigned
            3 close expiry shares -200 49
            4 open left-over put -200 52 05-17
            4 open left-over over +132.86
            4 close entry ordered 2
            5 open entry opened 2
            5 open entry shares +200
            5 open entry put +200 52 06-21
            5 open entry call -200 49 03-15
            5 close expiry call assigned
            5 close expiry shares -200 49
            6 open left-over put -200 52 06-21
            6 open left-over over -9.23
            6 close entry ordered 2
            7 open entry opened 2
            7 open entry shares +200
            7 open entry put +200 52 07-19
            7 open entry call -200 49 04-19
            7 close expiry call assigned
            7 close expiry shares -200 49
            8 open left-over put -200 52 07-19
            8 open left-over over -71.58
            8 close entry ordered 2
            9 open entry opened 2
            9 open entry shares +200
            9 open entry put +200 52 09-20
            9 open entry call -200 49 06-21
            """,
            "rising": """
            3 close expiry call assigned
            3 close expiry shares -200 49
            4 open left-over put -200 52 05-17
            4 open left-over over +22.82
            4 close entry ordered 2
            5 open entry opened 2
            5 open entry shares +200
            5 open entry put +200 54 06-21
            5 open entry call -200 50 03-15
            5 close expiry call assigned
            5 close expiry shares -200 50
            6 open left-over put -200 54 06-21
            6 open left-over over -67.55
            6 close entry ordered 2
            7 open entry opened 2
            7 open entry shares +200
            7 open entry put +200 55 07-19
            7 open entry call -200 51 04-19
            7 close expiry call assigned
            7 close expiry shares -200 51
            8 open left-over put -200 55 07-19
            8 open left-over over -134.36
            8 close entry ordered 2
            9 open entry opened 2
            9 open entry shares +200
            9 open entry put +200 56 09-20
            9 open entry call -200 52 06-21
            """,
            "falling": """
            3 close expiry call expired
            3 close roll call ordered 48 03-15
            4 open roll call -200 48 03-15
            5 close expiry call expired
            5 close roll call ordered 47 04-19
            6 open roll call -200 47 04-19
            7 close expiry call expired
            7 close roll call ordered 46 05-17
            8 open roll call -200 46 05-17
            8 close put-nearly-spent leaving
            9 open put-nearly-spent put -200 52 05-17
            9 open put-nearly-spent call +200 46 05-17
            9 open put-nearly-spent shares -200
            9 open put-nearly-spent over +873.11
            9 close entry ordered 2
            """,
            "gapping": """
            3 close expiry call assigned
            3 close expiry shares -200 49
            4 open left-over put -200 52 05-17
            4 open left-over over +961.69
            4 close entry ordered 2
            5 open entry opened 2
            5 open entry shares +200
            5 open entry put +200 46 06-21
            5 open entry call -200 43 03-15
            5 close expiry call assigned
            5 close expiry shares -200 43
            6 open left-over put -200 46 06-21
            6 open left-over over -8.18
            6 close entry ordered 2
            7 open entry opened 2
            7 open entry shares +200
            7 open entry put +200 45 07-19
            7 open entry call -200 43 04-19
            7 close expiry call expired
            7 close roll call ordered 42 05-17
            8 open roll call -200 42 05-17
            """,
        },
        {"days": MONTHS},
    ),
)
