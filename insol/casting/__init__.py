"""Casting: is the sky open from here in this direction, and what is met first."""
