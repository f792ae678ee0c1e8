"""Drawings of stored results; no computation of their own."""
