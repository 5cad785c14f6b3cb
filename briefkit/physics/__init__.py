"""Air, sections, rotor and trim: SI floats and numpy arrays only; no files, no aircraft, no widgets."""
