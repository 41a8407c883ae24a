"""What schemas/ says, as code."""
