"""From a network of parts to H(s): nodal analysis, poles, zeros and second-order sections."""
