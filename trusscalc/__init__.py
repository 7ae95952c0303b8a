"""Independent, documented hand checks of truss member forces."""
