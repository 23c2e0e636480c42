"""What a liquid or a gas weighs: density models and density profiles over elevation."""
