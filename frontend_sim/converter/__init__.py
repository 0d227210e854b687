"""When and how the ADC looks: clock, range, quantizer."""
