"""The contract of a process type and the unit-checked types of its fields."""
