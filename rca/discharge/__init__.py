"""The discharge side: compression of entrained air, heat, fuel and time for ignition."""
