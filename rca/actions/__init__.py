"""Corrective actions: states, guards, proof."""
