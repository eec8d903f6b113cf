"""The bench's tables: each room measures one thing on forms of the gallery and knows how its lines are printed."""
