"""What follows from brief and knowledge: sizing, screening, criteria, shortlist."""
