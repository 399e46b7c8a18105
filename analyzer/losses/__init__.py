"""Losses: one topology a file. What a part takes from its input, and what it turns into heat."""
