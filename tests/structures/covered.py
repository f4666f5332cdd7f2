"""Covered calls, shares alone and cash on markets of ten sessions."""

from __future__ import annotations

from structures.hand_case import Structure

STRUCTURES = (
    Structure(
        "covered call",
        "covered-call",
        """
        0 close entry ordered 2
        1 open entry opened 2
        1 open entry shares +200
        1 open entry call -200 50 02-16
        """,
        {
            "still": """
            9 close expiry call expired
            9 close expiry shares -200
            9 close expiry over +314.83
            9 close entry ordered 2
            """,
            "rising": """
            9 close expiry call assigned
            9 close expiry shares -200 50
            9 close expiry over +314.83
            9 close entry ordered 2
            """,
            "falling": """
            8 at:46.5 stop call +200 50 02-16
            8 at:46.5 stop shares -200
            8 at:46.5 stop over -385.24
            8 close entry ordered 2
            9 open entry opened 2
            9 open entry shares +200
            9 open entry call -200 47 03-15
            """,
            "gapping": """
            4 open stop-gap call +200 50 02-16
            4 open stop-gap shares -200
            4 open stop-gap over -841.28
            4 close entry ordered 2
            5 open entry opened 2
            5 open entry shares +200
            5 open entry call -200 44 03-15
            """,
        },
    ),
    Structure(
        "covered call in the money",
        "covered-call-in-the-money",
        """
        0 close entry ordered 2
        1 open entry opened 2
        1 open entry shares +200
        1 open entry call -200 47 02-16
        """,
        {
            "still": """
            9 close expiry call assigned
            9 close expiry shares -200 47
            9 close expiry over +94.60
            9 close entry ordered 2
            """,
            "rising": """
            9 close expiry call assigned
            9 close expiry shares -200 47
            9 close expiry over +94.60
            9 close entry ordered 2
            """,
            "falling": """
            8 at:46.5 stop call +200 47 02-16
            8 at:46.5 stop shares -200
            8 at:46.5 stop over -52.53
            8 close entry ordered 2
            9 open entry opened 2
            9 open entry shares +200
            9 open entry call -200 44 03-15
            """,
            "gapping": """
            4 open stop-gap call +200 47 02-16
            4 open stop-gap shares -200
            4 open stop-gap over -508.09
            4 close entry ordered 2
            5 open entry opened 2
            5 open entry shares +200
            5 open entry call -200 41 03-15
            """,
        },
    ),
    Structure(
        "covered call out of the money",
        "covered-call-out-of-the-money",
        """
        0 close entry ordered 2
        1 open entry opened 2
        1 open entry shares +200
        1 open entry call -200 54 02-16
        """,
        {
            "still": """
            9 close expiry call expired
            9 close expiry shares -200
            9 close expiry over +71.63
            9 close entry ordered 2
            """,
            "rising": """
            8 close roll call ordered 57 03-15
            9 open roll call +200 54 02-16
            9 open roll call -200 57 03-15
            """,
            "falling": """
            8 at:46.5 stop call +200 54 02-16
            8 at:46.5 stop shares -200
            8 at:46.5 stop over -628.37
            8 close entry ordered 2
            9 open entry opened 2
            9 open entry shares +200
            9 open entry call -200 50 03-15
            """,
            "gapping": """
            4 open stop-gap call +200 54 02-16
            4 open stop-gap shares -200
            4 open stop-gap over -1078.51
            4 close entry ordered 2
            5 open entry opened 2
            5 open entry shares +200
            5 open entry call -200 48 03-15
            """,
            "leaping": """
            9 close expiry call assigned
            9 close expiry shares -200 54
            9 close expiry over +871.63
            9 close entry ordered 2
            """,
        },
    ),
    Structure(
        "shares alone",
        "shares-alone",
        """
        0 close entry ordered 2
        1 open entry opened 2
        1 open entry shares +200
        5 night none dividend 0.3
        """,
        {
            "still": """
            """,
            "rising": """
            """,
            "falling": """
            """,
            "gapping": """
            """,
        },
        {"columns": {"dividend": {5: 0.3}}},
    ),
    Structure(
        "shares alone through a split",
        "shares-alone",
        """
        0 close entry ordered 2
        1 open entry opened 2
        1 open entry shares +200
        5 night none split 2
        """,
        {
            "split in two": """
            """,
        },
        {"columns": {"split": {5: 2.0}}},
    ),
)
