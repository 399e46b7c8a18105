"""Output: console, workbook, JSON and the other forms a ledger is written in."""
