"""What the teardown and the photographs show, by side."""
