"""Heat: from losses to junction temperature, margin and verdict."""
