"""Timings of the package beside other ways to do the same work."""
