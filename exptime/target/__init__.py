"""The target file and the records made from it."""
