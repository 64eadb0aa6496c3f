//! Reading fixtures and text, and simulating what was read on 64 input vectors at
//! once, for the tests of the formats.

#![allow(dead_code)]

use carrywise::format::{self, Parsed, ReadOptions};
use carrywise::netlist::{Driver, Netlist, Signal, Topology};
use carrywise::source::{Diagnostic, Source};
use std::path::Path;

/// Projections of six variables: vector `m` assigns bit `i` of `m` to variable `i`.
pub const VARIABLE: [u64; 6] = [
    0xAAAA_AAAA_AAAA_AAAA,
    0xCCCC_CCCC_CCCC_CCCC,
    0xF0F0_F0F0_F0F0_F0F0,
    0xFF00_FF00_FF00_FF00,
    0xFFFF_0000_FFFF_0000,
    0xFFFF_FFFF_0000_0000,
];

pub fn source(name: &str, bytes: impl AsRef<[u8]>) -> Source {
    Source {
        name: name.to_owned(),
        bytes: bytes.as_ref().to_vec(),
    }
}

/// The bytes of a file of `fixtures/formats/`.
pub fn fixture_bytes(name: &str) -> Vec<u8> {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures/formats");
    std::fs::read(path.join(name)).unwrap_or_else(|error| panic!("{name}: {error}"))
}

pub fn read(name: &str, bytes: impl AsRef<[u8]>) -> Result<Parsed, Vec<Diagnostic>> {
    format::read(&source(name, bytes), &ReadOptions::default())
}

/// Reads text that must be readable.
pub fn accept(name: &str, bytes: impl AsRef<[u8]>) -> Parsed {
    read(name, bytes).unwrap_or_else(|errors| panic!("{name}: {}", told(&errors)))
}

/// Reads a fixture that must be readable.
pub fn fixture(name: &str) -> Parsed {
    accept(name, fixture_bytes(name))
}

pub fn told(diagnostics: &[Diagnostic]) -> String {
    let lines: Vec<_> = diagnostics.iter().map(ToString::to_string).collect();
    lines.join("\n")
}

/// The values of all nets; nets that are cut read 0.
pub fn values(netlist: &Netlist, inputs: &[u64], registers: &[u64]) -> Vec<u64> {
    let topology = Topology::of(netlist);
    let mut values = vec![0u64; netlist.net_count()];
    for net in netlist.nets() {
        values[net.index()] = match netlist.driver(net) {
            Driver::Input(i) => inputs[i as usize],
            Driver::Register(r) => registers[r.index()],
            Driver::Constant(true) => !0,
            _ => 0,
        };
    }
    let mut pins = Vec::new();
    for &gate in &topology.order {
        let output = netlist.gate_output(gate);
        if topology.is_cut(output) {
            continue;
        }
        pins.clear();
        pins.extend(netlist.fan_ins(gate).iter().map(|net| values[net.index()]));
        values[output.index()] = netlist.function(gate).evaluate(&pins);
    }
    values
}

pub fn value(values: &[u64], signal: Signal) -> u64 {
    let plain = values[signal.net.index()];
    if signal.inverted { !plain } else { plain }
}

/// The values of the outputs.
pub fn outputs(netlist: &Netlist, inputs: &[u64], registers: &[u64]) -> Vec<u64> {
    let values = values(netlist, inputs, registers);
    let ports = netlist.outputs().iter();
    ports.map(|port| value(&values, port.signal)).collect()
}

/// The values that the registers take next.
pub fn next(netlist: &Netlist, inputs: &[u64], registers: &[u64]) -> Vec<u64> {
    let values = values(netlist, inputs, registers);
    let all = netlist.registers().iter();
    all.map(|register| value(&values, register.input)).collect()
}

pub fn input_names(netlist: &Netlist) -> Vec<String> {
    let inputs = netlist.inputs().iter();
    inputs.map(|&net| netlist.net_name(net)).collect()
}

pub fn output_names(netlist: &Netlist) -> Vec<String> {
    let outputs = netlist.outputs().iter();
    outputs.map(|port| netlist.output_name(port)).collect()
}
