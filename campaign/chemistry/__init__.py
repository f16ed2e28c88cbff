"""What an electrolyte and a potential are made of: species, recipes, ions, references.

Pure and of the standard library alone, so that logging a measurement stays fast.
"""
