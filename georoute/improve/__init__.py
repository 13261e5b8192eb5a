"""Days together: move visits between the tours of a plan."""
