"""heatledger: the thermal budget of every voltage regulator on a board, with its evidence."""
