"""A slow second opinion: the same sessions, walked in plain Python from the written rules alone."""
