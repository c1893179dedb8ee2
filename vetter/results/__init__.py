"""What an evaluation found, and the ways to say it: table, machine-readable files, figures."""
