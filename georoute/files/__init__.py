"""Files: atomic writes, hashes, cache folder, tables in and out."""
