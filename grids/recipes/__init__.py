"""How each shipped table is made; run through ``python -m vetter.grids.build``, never needed at run time."""
