"""What a device does: one leg at its duty."""
