"""The ways to say a sheet density: uniform, a formula, a grid file; gates and puddles over it."""
