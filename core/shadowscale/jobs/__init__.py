"""Whole jobs, each a function that reads like a table of contents."""
