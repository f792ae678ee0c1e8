"""The typed case: frozen records, SI inside; knows no check."""
