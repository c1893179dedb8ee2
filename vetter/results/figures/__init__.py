"""Figures for a paper: one column wide, one style, nothing told by colour alone, names written on what they name.

- magnitudes and residuals: ``spectral_energy``
- companion mass against second light: ``mass_and_light``
- which observation carries which exclusion: ``what_carries``
- hidden pairs between contact and instability: ``inner_pairs``
- posterior mass of the companion: ``mass_posterior``
"""
