"""From check results to evidence items: what was found, and how often it would be found."""
