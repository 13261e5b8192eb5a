"""Pages for browsers and paper, made from a plan."""
