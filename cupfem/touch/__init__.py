"""A finger on the wall: skin columns, criteria, hold time."""
