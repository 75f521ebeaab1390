"""What the user says: the brief, the composition of a product, and the facts about it."""
