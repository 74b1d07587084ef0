"""Pure formulas of the trade: star wheel, projection, time and angle, repeats."""
