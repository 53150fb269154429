"""Real fluids: published Helmholtz-energy equations, their saturation curves, and the searches for a state."""
