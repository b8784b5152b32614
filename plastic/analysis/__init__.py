"""What can be said about a study without running it: plain functions that return dataclasses."""
