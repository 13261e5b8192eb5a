"""Order within a day."""
