//! Models to a design: instances looked up, directions settled, sizes counted.
//!
//! Models reachable from the top are visited depth first on an explicit stack,
//! which also finds recursion. Their reverse finishing order puts every model
//! after those it instantiates; in that order connections are resolved, ports
//! that the text does not list are inferred, the directions of black boxes are
//! guessed, and the size of the flat netlist is summed, all before anything is
//! built.

use super::grammar::Called;
use super::model::{Local, Model, Port};
use super::tally::{Oddity, Tally};
use crate::netlist::{NameId, Names};
use crate::source::{Diagnostic, Place, escape, quote};
use rustc_hash::FxHashMap;

/// Most models that a message about recursion names.
const SHOWN: usize = 8;
/// Most errors told.
const MOST_ERRORS: usize = 20;

/// What one instance turned out to be.
pub(super) enum Callee {
    /// A model of the file: its index. `(formal, actual)` pairs lie in
    /// [`Linked::bound`].
    Model(usize),
    /// Not in the file. The actuals lie in the model's own bindings; the flag of
    /// each says whether the box drives it.
    Box,
}

/// What a model's instances turned out to be.
#[derive(Default)]
pub(super) struct Linked {
    pub(super) callees: Vec<Callee>,
    /// Per binding of the model: the callee's net, or for a box 1 when it drives
    /// the actual and 0 when it reads it.
    pub(super) bound: Vec<u32>,
}

/// How much one instance of a model comes to once flat.
#[derive(Clone, Copy, Default, Debug)]
pub(super) struct Size {
    pub(super) gates: u64,
    pub(super) pins: u64,
    pub(super) nets: u64,
    pub(super) registers: u64,
    pub(super) boxes: u64,
    pub(super) instances: u64,
}

impl Size {
    fn add(&mut self, other: Self) {
        for (mine, more) in [
            (&mut self.gates, other.gates),
            (&mut self.pins, other.pins),
            (&mut self.nets, other.nets),
            (&mut self.registers, other.registers),
            (&mut self.boxes, other.boxes),
            (&mut self.instances, other.instances),
        ] {
            *mine = mine.saturating_add(more);
        }
    }
}

/// A design ready to be flattened.
pub(super) struct Design {
    pub(super) models: Vec<Model>,
    pub(super) linked: Vec<Linked>,
    pub(super) top: usize,
    pub(super) size: Size,
}

/// Links the models below the top one.
pub(super) fn link(
    files: &[String],
    models: Vec<Model>,
    names: &Names,
    top: Option<&str>,
    tally: &mut Tally,
) -> Result<Design, Vec<Diagnostic>> {
    let mut by_name = FxHashMap::default();
    for (i, model) in models.iter().enumerate() {
        by_name.insert(model.name, i);
    }
    let top = find_top(files, &models, names, top, &by_name).map_err(|error| vec![error])?;
    let order = order(files, &models, names, top, &by_name).map_err(|error| vec![error])?;
    let count = models.len();
    let mut linker = Linker {
        files,
        names,
        by_name,
        tally,
        ports: (0..count).map(|_| FxHashMap::default()).collect(),
        linked: (0..count).map(|_| Linked::default()).collect(),
        sizes: vec![Size::default(); count],
        models,
        errors: Vec::new(),
    };
    for &model in &order {
        linker.model(model);
        if linker.errors.len() >= MOST_ERRORS {
            break;
        }
    }
    if linker.errors.is_empty() {
        Ok(Design {
            size: linker.sizes[top],
            models: linker.models,
            linked: linker.linked,
            top,
        })
    } else {
        Err(linker.errors)
    }
}

fn find_top(
    files: &[String],
    models: &[Model],
    names: &Names,
    top: Option<&str>,
    by_name: &FxHashMap<NameId, usize>,
) -> Result<usize, Diagnostic> {
    let Some(wanted) = top else { return Ok(0) };
    let found = names.find(wanted.as_bytes());
    if let Some(&index) = found.and_then(|name| by_name.get(&name)) {
        return Ok(index);
    }
    let mut held: Vec<String> = models
        .iter()
        .take(SHOWN)
        .map(|model| quote(names.bytes(model.name)))
        .collect();
    if models.len() > SHOWN {
        held.push(format!("{} more", models.len() - SHOWN));
    }
    Err(Diagnostic::error(
        &files[0],
        Place::File,
        format!(
            "expected a model {} as the top, found {}",
            quote(wanted.as_bytes()),
            held.join(", ")
        ),
        "name one of the models of the file",
    ))
}

/// The models below `top`, each after those it instantiates.
fn order(
    files: &[String],
    models: &[Model],
    names: &Names,
    top: usize,
    by_name: &FxHashMap<NameId, usize>,
) -> Result<Vec<usize>, Diagnostic> {
    const NEW: u8 = 0;
    const OPEN: u8 = 1;
    const DONE: u8 = 2;
    let mut state = vec![NEW; models.len()];
    let mut finished = Vec::new();
    let mut stack = vec![(top, 0)];
    state[top] = OPEN;
    while let Some((model, next)) = stack.last_mut() {
        let Some(instance) = models[*model].instances.get(*next) else {
            state[*model] = DONE;
            finished.push(*model);
            stack.pop();
            continue;
        };
        *next += 1;
        let file = models[*model].file;
        if instance.called != Called::Model {
            continue;
        }
        let Some(&callee) = by_name.get(&instance.model) else {
            continue;
        };
        match state[callee] {
            DONE => {}
            NEW => {
                state[callee] = OPEN;
                stack.push((callee, 0));
            }
            _ => {
                let start = stack.iter().position(|&(m, _)| m == callee).unwrap_or(0);
                let mut told: Vec<String> = stack[start..]
                    .iter()
                    .take(SHOWN)
                    .map(|&(m, _)| escape(names.bytes(models[m].name)))
                    .collect();
                if stack.len() - start > SHOWN {
                    told.push(format!("{} more", stack.len() - start - SHOWN));
                }
                told.push(escape(names.bytes(models[callee].name)));
                let error = Diagnostic::error(
                    &files[file],
                    Place::line(instance.line),
                    format!(
                        "expected a hierarchy without recursion, found {}",
                        told.join(" -> ")
                    ),
                    "a model cannot contain itself; give one of the instances another model",
                );
                return Err(if models[callee].file == file {
                    error.and(models[callee].line, "this model contains itself")
                } else {
                    error
                });
            }
        }
    }
    Ok(finished)
}

// Marks of a model's nets.
const DRIVEN: u8 = 1;
const READ: u8 = 2;

struct Linker<'a> {
    files: &'a [String],
    names: &'a Names,
    by_name: FxHashMap<NameId, usize>,
    tally: &'a mut Tally,
    /// By model: its ports by name, and whether the model drives them.
    ports: Vec<FxHashMap<NameId, (Local, bool)>>,
    linked: Vec<Linked>,
    sizes: Vec<Size>,
    models: Vec<Model>,
    errors: Vec<Diagnostic>,
}

impl Linker<'_> {
    fn model(&mut self, index: usize) {
        self.tally.file = self.models[index].file;
        let mut marks = vec![0u8; self.models[index].nets.len()];
        self.mark_own(index, &mut marks);
        self.connect(index, &mut marks);
        self.guess_boxes(index, &mut marks);
        if !self.models[index].ports_given {
            self.infer_ports(index, &marks);
        }
        let model = &self.models[index];
        let ports = &mut self.ports[index];
        for port in &model.outputs {
            ports.insert(model.nets[port.net as usize], (port.net, true));
        }
        // A name in both lists is driven from outside.
        for port in &model.inputs {
            ports.insert(model.nets[port.net as usize], (port.net, false));
        }
        self.sizes[index] = self.size(index);
    }

    fn mark_own(&self, index: usize, marks: &mut [u8]) {
        let model = &self.models[index];
        for port in &model.inputs {
            marks[port.net as usize] |= DRIVEN;
        }
        for i in 0..model.gates.len() {
            let (fan_ins, output) = model.gate_pins(i);
            for &net in fan_ins {
                marks[net as usize] |= READ;
            }
            marks[output as usize] |= DRIVEN;
        }
        for latch in &model.latches {
            marks[latch.input as usize] |= READ;
            marks[latch.output as usize] |= DRIVEN;
            if let Some(control) = latch.control {
                marks[control as usize] |= READ;
            }
        }
    }

    /// Resolves the formals of instances of models in the file.
    fn connect(&mut self, index: usize, marks: &mut [u8]) {
        let model = &self.models[index];
        let mut linked = Linked {
            callees: Vec::with_capacity(model.instances.len()),
            bound: vec![0; model.bindings.len()],
        };
        // By net of the callee: 1 + the instance that bound it last.
        let mut bound_by: FxHashMap<(usize, Local), usize> = FxHashMap::default();
        for (i, instance) in model.instances.iter().enumerate() {
            let callee = match instance.called {
                Called::Model => self.by_name.get(&instance.model).copied(),
                Called::Cell | Called::LatchCell | Called::StateTable => None,
            };
            let Some(callee) = callee else {
                let place = || Place::line(instance.line);
                let subject = self.names.bytes(instance.model);
                if instance.called != Called::StateTable {
                    self.tally
                        .count(Oddity::Missing(instance.called), subject, 1, place);
                }
                linked.callees.push(Callee::Box);
                continue;
            };
            linked.callees.push(Callee::Model(callee));
            for at in model.binding_range(i) {
                let binding = &model.bindings[at];
                let Some(&(net, drives)) = self.ports[callee].get(&binding.formal) else {
                    let fault =
                        self.unknown_formal(model.file, instance.line, binding.formal, callee);
                    self.errors.push(fault);
                    continue;
                };
                if bound_by.insert((callee, net), i) == Some(i) {
                    let formal = quote(self.names.bytes(binding.formal));
                    self.errors.push(Diagnostic::error(
                        &self.files[model.file],
                        Place::line(instance.line),
                        format!("expected port {formal} connected once, found it connected twice"),
                        "leave one of the connections out",
                    ));
                }
                linked.bound[at] = net;
                marks[binding.actual as usize] |= if drives { DRIVEN } else { READ };
            }
        }
        self.linked[index] = linked;
    }

    #[cold]
    fn unknown_formal(&self, file: usize, line: u32, formal: NameId, callee: usize) -> Diagnostic {
        let model = &self.models[callee];
        let error = Diagnostic::error(
            &self.files[file],
            Place::line(line),
            format!(
                "expected a port of model {}, found {}",
                quote(self.names.bytes(model.name)),
                quote(self.names.bytes(formal))
            ),
            "connect only names from the model's `.inputs` and `.outputs`",
        );
        if model.file == file {
            error.and(model.line, "the model begins here")
        } else {
            error
        }
    }

    /// An actual that nothing else drives is taken as driven by the first box
    /// that touches it.
    fn guess_boxes(&mut self, index: usize, marks: &mut [u8]) {
        let model = &self.models[index];
        let linked = &mut self.linked[index];
        for (i, callee) in linked.callees.iter().enumerate() {
            if !matches!(callee, Callee::Box) {
                continue;
            }
            for at in model.binding_range(i) {
                let mark = &mut marks[model.bindings[at].actual as usize];
                linked.bound[at] = u32::from(*mark & DRIVEN == 0);
                *mark |= if *mark & DRIVEN == 0 { DRIVEN } else { READ };
            }
        }
    }

    /// Neither list given: inputs are what nothing drives, outputs what nothing
    /// reads.
    fn infer_ports(&mut self, index: usize, marks: &[u8]) {
        let model = &mut self.models[index];
        let line = model.line;
        for (net, mark) in marks.iter().enumerate() {
            let port = Port {
                net: net as Local,
                line,
            };
            if mark & DRIVEN == 0 {
                model.inputs.push(port);
            } else if mark & READ == 0 {
                model.outputs.push(port);
            }
        }
    }

    fn size(&self, index: usize) -> Size {
        let model = &self.models[index];
        let mut size = Size {
            gates: model.gates.len() as u64,
            pins: model.pins.len() as u64,
            nets: model.nets.len() as u64,
            registers: model.latches.len() as u64,
            ..Size::default()
        };
        for (i, callee) in self.linked[index].callees.iter().enumerate() {
            let connections = model.binding_range(i).len() as u64;
            match *callee {
                Callee::Box => {
                    size.boxes += 1;
                    size.pins = size.pins.saturating_add(connections);
                }
                Callee::Model(callee) => {
                    size.add(self.sizes[callee]);
                    // Connected ports are nets of this model, counted already.
                    size.nets = size.nets.saturating_sub(connections);
                    size.instances = size.instances.saturating_add(1);
                }
            }
        }
        size
    }
}
