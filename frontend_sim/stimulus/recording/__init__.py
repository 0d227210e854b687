"""A recorded signal; one reader for each file format."""
