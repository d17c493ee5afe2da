"""Plans of polarized Raman and infrared experiments, made from an analysis."""
