"""From water content and bulk conductivity to that of the pore water and of the extract."""
