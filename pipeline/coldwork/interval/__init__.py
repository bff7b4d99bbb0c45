"""From sensitivities to uncertainty: own, shared, intervals, budget, lots."""
