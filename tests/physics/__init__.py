"""Laws of the physics, each with its source and a tolerance that is derived."""
