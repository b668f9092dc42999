"""Setups, jetting and runs of the cars; nothing is here yet."""
