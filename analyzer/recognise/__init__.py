"""Recognition: which components are regulators or passages, by rule file and by pins."""
