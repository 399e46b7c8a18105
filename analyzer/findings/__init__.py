"""Kinds of finding, one module a stage. `catalogue.every_kind()` lists them all."""
