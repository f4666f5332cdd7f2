"""Collars of one expiry on markets of ten sessions."""

from __future__ import annotations

from structures.hand_case import Structure

FORTNIGHT = "01-08 01-09 01-10 01-11 01-12 01-16 01-17 01-18 01-19 01-22"
QUARTER = "01-19 01-22 02-02 02-16 03-01 03-15 03-28 04-05 04-12 04-19"

STRUCTURES = (
    Structure(
        "collar",
        "collar",
        """
        0 close entry ordered 2
        1 open entry opened 2
        1 open entry shares +200
        1 open entry call -200 51 02-16
        1 open entry put +200 47 02-16
        """,
        {
            "still": """
            9 close expiry call expired
            9 close expiry put expired
            9 close expiry shares -200
            9 close expiry over +133.33
            9 close entry ordered 2
            """,
            "rising": """
            9 close expiry call assigned
            9 close expiry shares -200 51
            9 close expiry put expired
            9 close expiry over +333.33
            9 close entry ordered 2
            """,
            "falling": """
            9 close expiry call expired
            9 close expiry put exercised
            9 close expiry shares -200 47
            9 close expiry over -466.67
            9 close entry ordered 2
            """,
            "gapping": """
            9 close expiry call expired
            9 close expiry put exercised
            9 close expiry shares -200 47
            9 close expiry over -466.67
            9 close entry ordered 2
            """,
        },
    ),
    Structure(
        "reverse collar",
        "collar-reverse",
        """
        0 close entry ordered 2
        1 open entry opened 2
        1 open entry shares +200
        1 open entry call -200 49 02-16
        1 open entry put +200 52 02-16
        """,
        {
            "still": """
            9 close expiry call assigned
            9 close expiry shares -200 49
            9 close expiry put exercised
            9 close expiry shares -200 52
            9 close expiry shares +200
            9 close expiry over +61.88
            9 close entry ordered 2
            """,
            "rising": """
            9 close expiry call assigned
            9 close expiry shares -200 49
            9 close expiry put expired
            9 close expiry over -338.12
            9 close entry ordered 2
            """,
            "falling": """
            9 close expiry call expired
            9 close expiry put exercised
            9 close expiry shares -200 52
            9 close expiry over +261.88
            9 close entry ordered 2
            """,
            "gapping": """
            9 close expiry call expired
            9 close expiry put exercised
            9 close expiry shares -200 52
            9 close expiry over +261.88
            9 close entry ordered 2
            """,
        },
    ),
    Structure(
        "weekly collar",
        "collar-weekly",
        """
        0 close entry opened 2
        0 close entry shares +200
        0 close entry call -200 50 01-12
        0 close entry put +200 48 01-12
        """,
        {
            "still": """
            4 close expiry call expired
            4 close expiry put expired
            4 close expiry shares -200
            4 close expiry over +111.27
            4 close entry opened 2
            4 close entry shares +200
            4 close entry call -200 50 01-19
            4 close entry put +200 48 01-19
            8 close expiry call expired
            8 close expiry put expired
            8 close expiry shares -200
            8 close expiry over +130.68
            8 close entry opened 2
            8 close entry shares +200
            8 close entry call -200 50 01-26
            8 close entry put +200 48 01-26
            """,
            "rising": """
            4 close expiry call assigned
            4 close expiry shares -200 50
            4 close expiry put expired
            4 close expiry over +111.27
            4 close entry opened 2
            4 close entry shares +200
            4 close entry call -200 51.5 01-19
            4 close entry put +200 49 01-19
            8 close expiry call assigned
            8 close expiry shares -200 51.5
            8 close expiry put expired
            8 close expiry over +147.18
            8 close entry opened 2
            8 close entry shares +200
            8 close entry call -200 53.5 01-26
            8 close entry put +200 51 01-26
            """,
            "falling": """
            4 close expiry call expired
            4 close expiry put expired
            4 close expiry shares -200
            4 close expiry over -188.73
            4 close entry opened 2
            4 close entry shares +200
            4 close entry call -200 48.5 01-19
            4 close entry put +200 46.5 01-19
            8 close expiry call expired
            8 close expiry put expired
            8 close expiry shares -200
            8 close expiry over -271.27
            8 close entry opened 2
            8 close entry shares +200
            8 close entry call -200 46.5 01-26
            8 close entry put +200 44.5 01-26
            """,
            "gapping": """
            4 close expiry call expired
            4 close expiry put exercised
            4 close expiry shares -200 48
            4 close expiry over -288.73
            4 close entry opened 2
            4 close entry shares +200
            4 close entry call -200 44 01-19
            4 close entry put +200 42 01-19
            8 close expiry call expired
            8 close expiry put expired
            8 close expiry shares -200
            8 close expiry over -77.73
            8 close entry opened 2
            8 close entry shares +200
            8 close entry call -200 43 01-26
            8 close entry put +200 41 01-26
            """,
        },
        {"days": FORTNIGHT},
    ),
    Structure(
        "debit collar",
        "collar-debit",
        """
        0 close entry ordered 2
        1 open entry opened 2
        1 open entry shares +200
        1 open entry put +200 50 01-19
        1 open entry call -200 51 01-19
        """,
        {
            "still": """
            8 close expiry put expired
            8 close expiry call expired
            8 close expiry shares -200
            8 close expiry over -82.49
            8 close entry ordered 2
            9 open entry opened 2
            9 open entry shares +200
            9 open entry put +200 50 01-26
            9 open entry call -200 51 01-26
            """,
            "rising": """
            8 close expiry put expired
            8 close expiry call assigned
            8 close expiry shares -200 51
            8 close expiry over +117.51
            8 close entry ordered 2
            9 open entry opened 2
            9 open entry shares +200
            9 open entry put +200 53.5 01-26
            9 open entry call -200 54.5 01-26
            """,
            "falling": """
            8 close expiry put exercised
            8 close expiry shares -200 50
            8 close expiry call expired
            8 close expiry over -82.49
            8 close entry ordered 2
            9 open entry opened 2
            9 open entry shares +200
            9 open entry put +200 46.5 01-26
            9 open entry call -200 47.5 01-26
            """,
            "gapping": """
            8 close expiry put exercised
            8 close expiry shares -200 50
            8 close expiry call expired
            8 close expiry over -82.49
            8 close entry ordered 2
            9 open entry opened 2
            9 open entry shares +200
            9 open entry put +200 43 01-26
            9 open entry call -200 44 01-26
            """,
        },
        {"days": FORTNIGHT},
    ),
    Structure(
        "zero-cost collar",
        "collar-zero-cost",
        """
        0 close entry ordered 2
        1 open entry opened 2
        1 open entry shares +200
        1 open entry put +200 47 04-19
        1 open entry call -200 53 04-19
        """,
        {
            "still": """
            9 close expiry put expired
            9 close expiry call expired
            9 close expiry shares -200
            9 close expiry over +32.49
            9 close entry ordered 2
            """,
            "rising": """
            9 close expiry put expired
            9 close expiry call assigned
            9 close expiry shares -200 53
            9 close expiry over +632.49
            9 close entry ordered 2
            """,
            "falling": """
            9 close expiry put exercised
            9 close expiry shares -200 47
            9 close expiry call expired
            9 close expiry over -567.51
            9 close entry ordered 2
            """,
            "gapping": """
            9 close expiry put exercised
            9 close expiry shares -200 47
            9 close expiry call expired
            9 close expiry over -567.51
            9 close entry ordered 2
            """,
        },
        {"days": QUARTER},
    ),
    Structure(
        "reverse collar, called before a dividend",
        "collar-reverse",
        """
        0 close entry ordered 2
        1 open entry opened 2
        1 open entry shares +200
        1 open entry call -200 49 02-16
        1 open entry put +200 52 02-16
        8 night assigned-early call assigned
        8 night assigned-early shares -200 49
        8 open left-over put -200 52 02-16
        """,
        {
            "still": """
            8 open left-over over +66.77
            8 close entry ordered 2
            9 open entry opened 2
            9 open entry shares +200
            9 open entry call -200 49 03-15
            9 open entry put +200 52 03-15
            """,
            "rising": """
            8 open left-over over -308.52
            8 close entry ordered 2
            9 open entry opened 2
            9 open entry shares +200
            9 open entry call -200 52 03-15
            9 open entry put +200 56 03-15
            """,
        },
        {"columns": {"dividend": {8: 1.0}}},
    ),
)
