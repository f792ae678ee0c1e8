"""From evidence items to a verdict: mechanisms, side, causes, next test."""
