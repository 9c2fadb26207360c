"""How sure a set passes: spread inputs, samples of it, probabilities, sensitivities and corners."""
