"""The rationale: one content model of a result, and what writes it down."""
