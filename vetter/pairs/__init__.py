"""Is the unseen mass one body or a tight pair? Light, orbit and epoch velocities together, for ``vetter contrast``."""
