"""Whole jobs in a real browser, by the person who does them."""
