"""Tables: sweeps over altitude, temperature, power and rpm, and the content of a card."""
