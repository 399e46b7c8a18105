"""Thermal paths: one resistance model a file."""
