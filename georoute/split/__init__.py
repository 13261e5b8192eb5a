"""Sites to days: the first split."""
