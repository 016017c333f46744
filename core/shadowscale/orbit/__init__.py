"""The orbit: where the two stars are, on the sky and in velocity."""
