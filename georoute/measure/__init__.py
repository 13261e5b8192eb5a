"""Places to a cost matrix: seconds and metres of every leg."""
