"""Draws: who takes how much from which rail, and who has not said so."""
