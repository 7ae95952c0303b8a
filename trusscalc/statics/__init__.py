"""The exact route: equilibrium, cuts, plan and steps."""
