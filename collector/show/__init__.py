"""Text, figures and files from results. Nothing here computes physics."""
