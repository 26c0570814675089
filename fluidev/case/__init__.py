"""The case file: read, checked, in SI units."""
