"""What a star of given mass and age is: its temperature, radius, luminosity and gravity. Import the module you need.

- an ordinary star on the main sequence: :mod:`vetter.stars.main_sequence`
- the mass of a seen star from its spectrum: :mod:`vetter.stars.empirical_mass`
- a white dwarf: :mod:`vetter.stars.white_dwarf`; a stripped helium star: :mod:`vetter.stars.helium`
- the published formulas underneath: :mod:`vetter.stars.hpt`, :mod:`vetter.stars.dwarf_table`
"""
