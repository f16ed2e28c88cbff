"""The formulas of electrode kinetics: one topic a module, NumPy in, NumPy out."""
