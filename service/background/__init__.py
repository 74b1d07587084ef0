"""Background work: orders are planned by workers, whose children may be killed without anything being lost."""
