"""Arrays to bqplot figures, and figures to stills: one definition for the screen and the page."""
