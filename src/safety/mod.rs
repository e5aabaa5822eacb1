//! What may be done now: proofs, hold points, hazards, and the gate that alone clears a check.
