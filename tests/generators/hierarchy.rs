//! Circuits in several models: what a hierarchical BLIF file says, and the same
//! flattened to one [`Circuit`].
//!
//! The first model is the design. A net inside an instance is called by the
//! instance path, parts joined by `/`, unless it reaches a port: then it goes by
//! its topmost name.

use super::blif;
use super::cells::Cell;
use super::circuit::{Circuit, Function, Net};
use std::collections::HashMap;
use std::fmt::Write;

/// One statement of a model; nets by name.
#[derive(Clone, Debug)]
pub enum Item {
    /// A gate: function, inputs, output.
    Gate(Function, Vec<String>, String),
    /// A register: next, output; it starts at 0.
    Register(String, String),
    /// An instance: its name, its model, `(formal, actual)`.
    Instance(String, String, Vec<(String, String)>),
}

/// One model.
#[derive(Clone, Debug, Default)]
pub struct Model {
    /// Its name.
    pub name: String,
    /// Input ports.
    pub inputs: Vec<String>,
    /// Output ports.
    pub outputs: Vec<String>,
    /// Its statements.
    pub items: Vec<Item>,
}

/// Models, the design first.
#[derive(Clone, Debug, Default)]
pub struct Hierarchy {
    /// The models.
    pub models: Vec<Model>,
}

/// The names `bus[0]` to `bus[width - 1]`.
pub fn bus(name: &str, width: usize) -> Vec<String> {
    (0..width).map(|i| format!("{name}[{i}]")).collect()
}

impl Model {
    /// An empty model.
    pub fn new(name: &str) -> Self {
        Self {
            name: name.to_owned(),
            ..Self::default()
        }
    }

    /// Adds a gate; returns the name of its output.
    pub fn gate(&mut self, function: Function, inputs: &[&str], output: &str) -> String {
        let inputs = inputs.iter().map(|name| (*name).to_owned()).collect();
        self.items
            .push(Item::Gate(function, inputs, output.to_owned()));
        output.to_owned()
    }

    /// Adds a register.
    pub fn register(&mut self, next: &str, output: &str) {
        self.items
            .push(Item::Register(next.to_owned(), output.to_owned()));
    }

    /// Adds an instance.
    pub fn instance<F: AsRef<str>, A: AsRef<str>>(
        &mut self,
        name: &str,
        model: &str,
        bindings: impl IntoIterator<Item = (F, A)>,
    ) {
        let bindings = bindings
            .into_iter()
            .map(|(formal, actual)| (formal.as_ref().to_owned(), actual.as_ref().to_owned()))
            .collect();
        self.items
            .push(Item::Instance(name.to_owned(), model.to_owned(), bindings));
    }
}

impl Hierarchy {
    /// The text, one `.model` after the other.
    pub fn blif(&self) -> String {
        let mut text = String::new();
        for (index, model) in self.models.iter().enumerate() {
            if index > 0 {
                text.push('\n');
            }
            writeln!(text, ".model {}", model.name).unwrap();
            blif::list(&mut text, ".inputs", model.inputs.clone());
            blif::list(&mut text, ".outputs", model.outputs.clone());
            for item in &model.items {
                match item {
                    Item::Gate(function, inputs, output) => {
                        let names = inputs.iter().chain([output]).cloned();
                        blif::list(&mut text, ".names", names);
                        blif::rows(&mut text, *function, inputs.len());
                    }
                    Item::Register(next, output) => {
                        writeln!(text, ".latch {next} {output} 0").unwrap();
                    }
                    Item::Instance(_, model, bindings) => {
                        let bound = bindings.iter().map(|(f, a)| format!("{f}={a}"));
                        let words = std::iter::once(model.clone()).chain(bound);
                        blif::list(&mut text, ".subckt", words);
                    }
                }
            }
            text.push_str(".end\n");
        }
        text
    }

    fn model(&self, name: &str) -> &Model {
        let found = self.models.iter().find(|model| model.name == name);
        found.unwrap_or_else(|| panic!("no model {name}"))
    }

    /// The design as one circuit.
    pub fn flatten(&self) -> Circuit {
        let top = &self.models[0];
        let mut c = Circuit::new(&top.name);
        let mut nets: HashMap<String, Net> = HashMap::new();
        for name in &top.inputs {
            nets.insert(name.clone(), c.input(name));
        }
        self.expand(&mut c, &mut nets, top, "", &HashMap::new());
        c.outputs = top.outputs.iter().map(|name| nets[name]).collect();
        c
    }

    fn expand(
        &self,
        c: &mut Circuit,
        nets: &mut HashMap<String, Net>,
        model: &Model,
        path: &str,
        bound: &HashMap<&str, String>,
    ) {
        let full = |name: &str| match bound.get(name) {
            Some(actual) => actual.clone(),
            None => format!("{path}{name}"),
        };
        let mut net = |c: &mut Circuit, name: String| match nets.get(&name) {
            Some(&net) => net,
            None => {
                let net = c.net(Some(&name));
                nets.insert(name, net);
                net
            }
        };
        let mut inner = Vec::new();
        for item in &model.items {
            match item {
                Item::Gate(function, inputs, output) => {
                    let pins: Vec<Net> = inputs.iter().map(|name| net(c, full(name))).collect();
                    let output = net(c, full(output));
                    c.drive(output, *function, &pins);
                }
                Item::Register(next, output) => {
                    let (next, output) = (net(c, full(next)), net(c, full(output)));
                    c.registers.push(super::Register {
                        output,
                        next,
                        initial: Some(false),
                    });
                }
                Item::Instance(name, model, bindings) => {
                    let bindings: HashMap<&str, String> = bindings
                        .iter()
                        .map(|(formal, actual)| (formal.as_str(), full(actual)))
                        .collect();
                    inner.push((format!("{path}{name}/"), self.model(model), bindings));
                }
            }
        }
        for (path, model, bindings) in inner {
            self.expand(c, nets, model, &path, &bindings);
        }
    }
}

/// A model with the ports of a full adder (`a b cin` to `s cout`), or of a half
/// adder when `half` (`a b` to `s cout`), made of a cell style that passes true
/// carries.
pub fn cell_model(name: &str, cell: Cell, half: bool) -> Model {
    use super::cells::{Addend, Carry};
    let mut c = Circuit::new(name);
    let (a, b) = (c.input("a"), c.input("b"));
    let carry = if half {
        Carry::Zero
    } else {
        Carry::Net(c.input("cin"))
    };
    let (s, carry) = cell.step(&mut c, a, Addend::Net(b), carry);
    let Carry::Net(carry) = carry else {
        panic!("{cell:?} inverts its carry")
    };
    c.output(s, "s");
    c.output(carry, "cout");
    let mut model = Model::new(name);
    model.inputs = c.inputs.iter().map(|&net| c.name_of(net)).collect();
    model.outputs = c.outputs.iter().map(|&net| c.name_of(net)).collect();
    for gate in 0..c.gate_count() {
        let (function, inputs, output) = c.gate_at(gate);
        let pins = inputs.iter().map(|&net| c.name_of(net)).collect();
        model
            .items
            .push(Item::Gate(function, pins, c.name_of(output)));
    }
    model
}

/// A ripple adder of full-adder instances (a half adder first), carry-out
/// `cout`; ports as those of [`super::Word::generate`].
pub fn adder_hierarchy(bits: usize, cell: Cell) -> Hierarchy {
    let mut top = Model::new("adder");
    top.inputs = bus("a", bits).into_iter().chain(bus("b", bits)).collect();
    top.outputs = bus("s", bits)
        .into_iter()
        .chain(["cout".to_owned()])
        .collect();
    ripple_instances(&mut top, ["a", "b", "s"], bits, "cout");
    let full = cell_model("full_adder", cell, false);
    let half = cell_model("half_adder", cell, true);
    Hierarchy {
        models: vec![top, full, half],
    }
}

/// Instances `fa_0`… of `full_adder` (`half_adder` at bit 0) over three buses.
pub fn ripple_instances(model: &mut Model, [a, b, s]: [&str; 3], bits: usize, cout: &str) {
    for i in 0..bits {
        let carry = |i: usize| {
            if i == bits {
                cout.to_owned()
            } else {
                format!("c[{i}]")
            }
        };
        let mut pins = vec![("a", format!("{a}[{i}]")), ("b", format!("{b}[{i}]"))];
        if i > 0 {
            pins.push(("cin", carry(i)));
        }
        pins.push(("s", format!("{s}[{i}]")));
        pins.push(("cout", carry(i + 1)));
        let cell = if i == 0 { "half_adder" } else { "full_adder" };
        model.instance(&format!("fa_{i}"), cell, pins);
    }
}
