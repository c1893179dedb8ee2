"""Laws that need no data: Keplerian orbits, Thiele-Innes elements, Roche lobes. Import the module you need."""
