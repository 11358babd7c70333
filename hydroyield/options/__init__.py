"""How many units, of what size: options, how they are ranked, and which differences are real."""
