"""Formulas of the membrane, the cable, the receptors, release and spikes, on plain arrays."""
