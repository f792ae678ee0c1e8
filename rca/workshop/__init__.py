"""Kept scripts that make shipped data; not part of the installed program."""
