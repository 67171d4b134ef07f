"""The scoring model: treatment, score, contributions, interval, calibration, fit."""
