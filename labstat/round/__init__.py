"""What the user handed in: the plan and the tables, read, checked, every row accounted for."""
