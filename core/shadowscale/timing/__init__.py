"""Periods, eclipses and their times."""
