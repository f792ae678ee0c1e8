"""Published statistics as plain functions; knows no case."""
