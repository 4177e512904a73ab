"""Everything decided before the field, and its record."""
