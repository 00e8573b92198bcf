//! What the benches share: bodies, walls and lamps with fixed seeds.
//!
//! A bench is a file in `benches/`, one a layer, with its throughput in photons. `peers/` holds the programs that a
//! speed claim is measured against.
