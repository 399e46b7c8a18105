"""heatledger: the thermal budget of every voltage regulator on a board, with its evidence."""

__version__ = "0.1.0"
