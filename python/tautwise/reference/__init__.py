"""The slow, plain twin of the solver: NumPy only, written from the definitions, an oracle for its tests."""
