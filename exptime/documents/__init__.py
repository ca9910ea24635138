"""Files that users give, read into values that know where they stand."""
