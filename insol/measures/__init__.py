"""Measures: hours, shaded fraction, spells; arithmetic on stored masks."""
