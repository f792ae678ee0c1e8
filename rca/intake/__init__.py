"""Reads a case folder into a typed case and reports every problem at once."""
