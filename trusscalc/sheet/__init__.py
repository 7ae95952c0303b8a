"""What is on the calculation sheet: blocks, figures, composition."""
