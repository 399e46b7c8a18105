"""Archives: every project below some folders, audited in parallel, each board by itself."""
