"""What the pressure, temperature and speed records show."""
