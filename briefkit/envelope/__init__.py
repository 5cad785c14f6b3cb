"""What follows from manual and rotor at a condition: the equivalent VNE, reductions, the onset band, cues."""
