"""Typed results to JSON and back; results.json, record.json, their schemas."""
