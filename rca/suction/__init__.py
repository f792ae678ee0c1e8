"""The suction side: pressure budget, released air, what restricted the flow."""
