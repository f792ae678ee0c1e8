"""Published physics as plain functions of SI floats and arrays; knows no case."""
