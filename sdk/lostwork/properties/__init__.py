"""Matter: components, the contract of a backend, fluids and states on the common datum."""
