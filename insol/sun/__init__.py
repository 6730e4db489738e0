"""The sun: where it stands, when it is up, and the intervals a period is made of."""
