"""What every floor may use: errors, units, sources, readings."""
