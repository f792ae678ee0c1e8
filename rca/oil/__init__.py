"""What the oil reports show: limits, change from new oil, trends."""
