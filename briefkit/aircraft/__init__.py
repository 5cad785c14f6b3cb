"""What a person typed: the aircraft with its manual's charts and limits, and the operation."""
