"""Lays stored results out as HTML and PDF."""
