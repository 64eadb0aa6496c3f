//! A circuit as a list of gates, registers and ports: the one value every
//! generator makes and every writer reads.
//!
//! Gates may stand in any order (a disguise shuffles them); [`Circuit::order`]
//! sorts them without recursion. Nets are numbered and may have names; a net
//! without one is written `n` and its number. An output port is a net and has
//! the net's name.

/// One net.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub struct Net(pub u32);

impl Net {
    /// The number as an array index.
    pub fn index(self) -> usize {
        self.0 as usize
    }
}

/// What a gate computes.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Function {
    /// Constant 0 (no inputs).
    Zero,
    /// Constant 1 (no inputs).
    One,
    /// The one input.
    Buffer,
    /// The one input inverted.
    Not,
    /// Product.
    And,
    /// Product, inverted.
    Nand,
    /// Sum.
    Or,
    /// Sum, inverted.
    Nor,
    /// Parity.
    Xor,
    /// Parity, inverted.
    Xnor,
    /// The OR of the rows, written as BLIF writes them: `1`, `0` or `-` per input.
    Cover(&'static [&'static str]),
    /// A truth table of up to six inputs: bit `m` is the value where input `i`
    /// is bit `i` of `m`.
    Table(u64),
}

impl Function {
    /// The value on 64 patterns.
    pub fn evaluate(self, inputs: &[u64]) -> u64 {
        let and = || inputs.iter().fold(!0, |all, w| all & w);
        let or = || inputs.iter().fold(0, |any, w| any | w);
        let xor = || inputs.iter().fold(0, |odd, w| odd ^ w);
        match self {
            Self::Zero => 0,
            Self::One => !0,
            Self::Buffer => inputs[0],
            Self::Not => !inputs[0],
            Self::And => and(),
            Self::Nand => !and(),
            Self::Or => or(),
            Self::Nor => !or(),
            Self::Xor => xor(),
            Self::Xnor => !xor(),
            Self::Table(ones) => (0..1u32 << inputs.len())
                .filter(|m| ones >> m & 1 == 1)
                .fold(0, |any, m| {
                    let pins = inputs.iter().enumerate();
                    any | pins.fold(!0, |all, (i, w)| {
                        all & if m >> i & 1 == 1 { *w } else { !w }
                    })
                }),
            Self::Cover(rows) => rows.iter().fold(0, |any, row| {
                let literals = row.bytes().zip(inputs);
                any | literals.fold(!0, |all, (literal, word)| match literal {
                    b'1' => all & word,
                    b'0' => all & !word,
                    _ => all,
                })
            }),
        }
    }
}

/// A register: `output` takes the value of `next` at the clock.
#[derive(Clone, Copy, Debug)]
pub struct Register {
    /// The net it drives.
    pub output: Net,
    /// The net it samples; equals `output` until [`Circuit::set_next`].
    pub next: Net,
    /// The value after reset, when it has one.
    pub initial: Option<bool>,
}

/// A circuit; see the head of the file.
#[derive(Clone, Debug)]
pub struct Circuit {
    /// The model's name.
    pub name: String,
    /// Input ports in order.
    pub inputs: Vec<Net>,
    /// Output ports in order.
    pub outputs: Vec<Net>,
    /// Registers in order.
    pub registers: Vec<Register>,
    names: Vec<Option<Box<str>>>,
    functions: Vec<Function>,
    driven: Vec<Net>,
    starts: Vec<u32>,
    fan_ins: Vec<Net>,
}

impl Circuit {
    /// An empty circuit.
    pub fn new(name: &str) -> Self {
        Self {
            name: name.to_owned(),
            inputs: Vec::new(),
            outputs: Vec::new(),
            registers: Vec::new(),
            names: Vec::new(),
            functions: Vec::new(),
            driven: Vec::new(),
            starts: vec![0],
            fan_ins: Vec::new(),
        }
    }

    /// A new net, for a gate added later.
    pub fn net(&mut self, name: Option<&str>) -> Net {
        self.names.push(name.map(Box::from));
        Net(self.names.len() as u32 - 1)
    }

    /// A new input port.
    pub fn input(&mut self, name: &str) -> Net {
        let net = self.net(Some(name));
        self.inputs.push(net);
        net
    }

    /// Input ports `name[0]` to `name[width - 1]`, least significant first.
    pub fn input_bus(&mut self, name: &str, width: usize) -> Vec<Net> {
        (0..width)
            .map(|i| self.input(&format!("{name}[{i}]")))
            .collect()
    }

    /// A new register; its next value is stated by [`Self::set_next`].
    pub fn register(&mut self, name: &str, initial: Option<bool>) -> Net {
        let output = self.net(Some(name));
        self.registers.push(Register {
            output,
            next: output,
            initial,
        });
        output
    }

    /// Registers `name[0]` to `name[width - 1]`, all starting at 0.
    pub fn register_bus(&mut self, name: &str, width: usize) -> Vec<Net> {
        (0..width)
            .map(|i| self.register(&format!("{name}[{i}]"), Some(false)))
            .collect()
    }

    /// States the next value of the last registers added, one per net.
    pub fn set_next(&mut self, outputs: &[Net], next: &[Net]) {
        assert_eq!(outputs.len(), next.len());
        let mut at = 0;
        for (&output, &next) in outputs.iter().zip(next) {
            while self.registers[at].output != output {
                at += 1;
            }
            self.registers[at].next = next;
        }
    }

    /// A gate that drives a new net.
    pub fn gate(&mut self, function: Function, inputs: &[Net]) -> Net {
        let net = self.net(None);
        self.drive(net, function, inputs);
        net
    }

    /// A gate that drives a net made before.
    pub fn drive(&mut self, output: Net, function: Function, inputs: &[Net]) {
        self.functions.push(function);
        self.driven.push(output);
        self.fan_ins.extend_from_slice(inputs);
        self.starts.push(self.fan_ins.len() as u32);
    }

    /// Inverter.
    pub fn not(&mut self, a: Net) -> Net {
        self.gate(Function::Not, &[a])
    }

    /// Two-input AND.
    pub fn and(&mut self, a: Net, b: Net) -> Net {
        self.gate(Function::And, &[a, b])
    }

    /// Two-input OR.
    pub fn or(&mut self, a: Net, b: Net) -> Net {
        self.gate(Function::Or, &[a, b])
    }

    /// Two-input XOR.
    pub fn xor(&mut self, a: Net, b: Net) -> Net {
        self.gate(Function::Xor, &[a, b])
    }

    /// `select ? high : low`, one gate.
    pub fn mux(&mut self, select: Net, high: Net, low: Net) -> Net {
        self.gate(Function::Cover(&["11-", "0-1"]), &[select, high, low])
    }

    /// Makes `net` an output port called `name`: names the net when it has no
    /// name yet, else puts a buffer behind it. Returns the port's net.
    pub fn output(&mut self, net: Net, name: &str) -> Net {
        let port = if self.names[net.index()].is_none() {
            self.set_name(net, name);
            net
        } else {
            let port = self.gate(Function::Buffer, &[net]);
            self.set_name(port, name);
            port
        };
        self.outputs.push(port);
        port
    }

    /// Output ports `name[0]`…, least significant first.
    pub fn output_bus(&mut self, nets: &[Net], name: &str) {
        for (i, &net) in nets.iter().enumerate() {
            self.output(net, &format!("{name}[{i}]"));
        }
    }

    /// Names a net, whatever it was called.
    pub fn set_name(&mut self, net: Net, name: &str) {
        self.names[net.index()] = Some(name.into());
    }

    /// The name a net is written with.
    pub fn name_of(&self, net: Net) -> String {
        match &self.names[net.index()] {
            Some(name) => name.to_string(),
            None => format!("n{}", net.0),
        }
    }

    /// The name given to a net, when it has one.
    pub fn given_name(&self, net: Net) -> Option<&str> {
        self.names[net.index()].as_deref()
    }

    /// Number of nets made.
    pub fn net_count(&self) -> usize {
        self.names.len()
    }

    /// Number of gates.
    pub fn gate_count(&self) -> usize {
        self.functions.len()
    }

    /// One gate: function, inputs, output.
    pub fn gate_at(&self, gate: usize) -> (Function, &[Net], Net) {
        let range = self.starts[gate] as usize..self.starts[gate + 1] as usize;
        (
            self.functions[gate],
            &self.fan_ins[range],
            self.driven[gate],
        )
    }

    /// Makes a gate compute something else of its inputs.
    pub fn set_function(&mut self, gate: usize, function: Function) {
        self.functions[gate] = function;
    }

    /// Keeps the gates listed, in that order.
    pub fn keep_gates(&mut self, gates: &[u32]) {
        let old = self.clone();
        self.functions.clear();
        self.driven.clear();
        self.fan_ins.clear();
        self.starts.truncate(1);
        for &gate in gates {
            let (function, inputs, output) = old.gate_at(gate as usize);
            self.drive(output, function, inputs);
        }
    }

    fn driver_table(&self) -> Vec<u32> {
        let mut drivers = vec![u32::MAX; self.names.len()];
        for (gate, net) in self.driven.iter().enumerate() {
            drivers[net.index()] = gate as u32;
        }
        drivers
    }

    /// The gates sorted so that inputs come before their readers; otherwise as
    /// they stand. Panics on a loop.
    pub fn order(&self) -> Vec<u32> {
        let drivers = self.driver_table();
        // 0 unseen, 1 open, 2 placed.
        let mut state = vec![0u8; self.functions.len()];
        let mut order = Vec::with_capacity(self.functions.len());
        let mut stack = Vec::new();
        for root in 0..self.functions.len() as u32 {
            stack.push((root, self.starts[root as usize]));
            while let Some((gate, at)) = stack.pop() {
                if state[gate as usize] == 2 {
                    continue;
                }
                state[gate as usize] = 1;
                let end = self.starts[gate as usize + 1];
                let mut next = at;
                let open = (at..end).find_map(|i| {
                    let driver = drivers[self.fan_ins[i as usize].index()];
                    next = i + 1;
                    (driver != u32::MAX && state[driver as usize] != 2).then_some(driver)
                });
                if let Some(driver) = open {
                    assert_eq!(state[driver as usize], 0, "the circuit has a loop");
                    stack.push((gate, next));
                    stack.push((driver, self.starts[driver as usize]));
                } else {
                    state[gate as usize] = 2;
                    order.push(gate);
                }
            }
        }
        order
    }

    /// Removes gates that nothing reads, and what only they read.
    pub fn drop_unread(&mut self) {
        let drivers = self.driver_table();
        let mut kept = vec![false; self.functions.len()];
        let next = self.registers.iter().map(|r| r.next);
        let mut open: Vec<Net> = self.outputs.iter().copied().chain(next).collect();
        while let Some(net) = open.pop() {
            let gate = drivers[net.index()];
            if gate != u32::MAX && !kept[gate as usize] {
                kept[gate as usize] = true;
                open.extend_from_slice(self.gate_at(gate as usize).1);
            }
        }
        let gates: Vec<u32> = (0..kept.len() as u32)
            .filter(|&gate| kept[gate as usize])
            .collect();
        self.keep_gates(&gates);
    }

    /// The value of every net on 64 patterns: one word per input, one per
    /// register's present value.
    pub fn evaluate(&self, inputs: &[u64], state: &[u64]) -> Vec<u64> {
        assert_eq!(inputs.len(), self.inputs.len());
        assert_eq!(state.len(), self.registers.len());
        let mut values = vec![0; self.names.len()];
        for (net, &word) in self.inputs.iter().zip(inputs) {
            values[net.index()] = word;
        }
        for (register, &word) in self.registers.iter().zip(state) {
            values[register.output.index()] = word;
        }
        let mut words = Vec::new();
        for gate in self.order() {
            let (function, fan_ins, output) = self.gate_at(gate as usize);
            words.clear();
            words.extend(fan_ins.iter().map(|net| values[net.index()]));
            values[output.index()] = function.evaluate(&words);
        }
        values
    }

    /// Gates on the longest path.
    pub fn depth(&self) -> usize {
        let mut levels = vec![0usize; self.names.len()];
        for gate in self.order() {
            let (_, fan_ins, output) = self.gate_at(gate as usize);
            let deepest = fan_ins.iter().map(|net| levels[net.index()]).max();
            levels[output.index()] = deepest.map_or(0, |level| level + 1);
        }
        levels.into_iter().max().unwrap_or(0)
    }

    /// The gates on one longest path, inputs first, by output net.
    pub fn longest_path(&self) -> Vec<Net> {
        let mut levels = vec![0usize; self.names.len()];
        for gate in self.order() {
            let (_, fan_ins, output) = self.gate_at(gate as usize);
            let deepest = fan_ins.iter().map(|net| levels[net.index()]).max();
            levels[output.index()] = deepest.map_or(0, |level| level + 1);
        }
        let drivers = self.driver_table();
        let last = (0..levels.len()).max_by_key(|&net| levels[net]);
        let mut path: Vec<Net> = last.map(|net| Net(net as u32)).into_iter().collect();
        while let Some(&net) = path.last() {
            let gate = drivers[net.index()];
            if gate == u32::MAX {
                break;
            }
            let fan_ins = self.gate_at(gate as usize).1;
            match fan_ins.iter().max_by_key(|net| levels[net.index()]) {
                Some(&deepest) => path.push(deepest),
                None => break,
            }
        }
        path.reverse();
        path
    }
}
