"""Roads: from an OpenStreetMap extract, or any edge table, to drive times and shapes of legs."""
