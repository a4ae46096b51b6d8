//! Descriptors compiled into a flat list of operations.

use super::table::{Edition, Kind, element_in, sequence};

/// Most operations a template may compile to; the largest surface template has about 600.
const OPERATIONS_MAX: usize = 20_000;
/// Deepest nesting of sequences and replications; table D goes six deep.
const DEPTH_MAX: usize = 24;

/// A list of operations made from a message's descriptors.
#[derive(Debug, Clone, PartialEq)]
pub struct Template {
    pub(super) operations: Vec<Operation>,
}

/// One step through a data section.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum Operation {
    /// Read an element.
    Element(Field),
    /// Do the next `body` operations as often as `count` says.
    Loop { count: Count, body: usize },
    /// 203YYY: read a new reference value for an element, sign and magnitude.
    NewReference { descriptor: u32, width: u32 },
    /// Pass over bits that no element is known for (206YYY), or text put in by 205YYY.
    Skip { width: u32 },
    /// 222000 and its like: what follows tells about the data and is none.
    AboutData,
    /// A descriptor that no table holds: its width is unknown and so is all that follows.
    Unknown { descriptor: u32 },
}

/// How an element lies in the data.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Field {
    pub(super) descriptor: u32,
    pub(super) kind: Kind,
    pub(super) scale: i32,
    pub(super) reference: i64,
    pub(super) width: u32,
    /// Bits of associated field in front of it (204YYY).
    pub(super) associated: u32,
    /// Whether 203YYY may have changed its reference value.
    pub(super) new_reference: bool,
}

/// How often a loop runs.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum Count {
    /// As often as the descriptor says.
    Fixed(u32),
    /// As often as a factor of this width in the data says.
    Delayed { descriptor: u32, width: u32 },
    /// 031011, 031012: the data stand once and mean that many.
    Once { descriptor: u32, width: u32 },
}

/// What the operators in force do to the elements that follow.
#[derive(Debug, Clone, Default)]
struct State {
    edition: Option<Edition>,
    width_added: i32,
    scale_added: i32,
    scale_increase: i32,
    text_octets: u32,
    reference_width: u32,
    new_references: Vec<u32>,
    associated: Vec<u32>,
    local_width: Option<u32>,
}

impl State {
    fn edition(&self) -> Edition {
        self.edition.unwrap_or(Edition::NEWEST)
    }
}

impl Template {
    /// Compiles descriptors, each six decimal digits FXXYYY.
    ///
    /// # Errors
    ///
    /// A sentence, where the list contradicts itself or grows beyond bounds.
    pub(super) fn compile(descriptors: &[u32], edition: Edition) -> Result<Self, String> {
        let mut template = Self { operations: Vec::new() };
        let mut state = State { edition: Some(edition), ..State::default() };
        template.list(descriptors, &mut state, 0)?;
        Ok(template)
    }

    fn list(&mut self, list: &[u32], state: &mut State, depth: usize) -> Result<(), String> {
        if depth > DEPTH_MAX {
            return Err(format!("descriptors nested deeper than {DEPTH_MAX}"));
        }
        let mut at = 0;
        while let Some(&descriptor) = list.get(at) {
            at += 1;
            if self.operations.len() > OPERATIONS_MAX {
                return Err(format!("more than {OPERATIONS_MAX} elements in one template"));
            }
            match descriptor / 100_000 {
                0 => self.element(descriptor, state),
                1 => at = self.replication(list, at, descriptor, state, depth)?,
                2 => self.operator(descriptor, state)?,
                _ => match sequence(descriptor, state.edition()) {
                    Some(members) => self.list(members, state, depth + 1)?,
                    None => self.operations.push(Operation::Unknown { descriptor }),
                },
            }
        }
        Ok(())
    }

    /// 1XXYYY. Returns where the list goes on.
    fn replication(
        &mut self,
        list: &[u32],
        mut at: usize,
        descriptor: u32,
        state: &mut State,
        depth: usize,
    ) -> Result<usize, String> {
        let members = usize::try_from(descriptor / 1000 % 100).unwrap_or(0);
        let times = descriptor % 1000;
        let count = if times > 0 {
            Count::Fixed(times)
        } else {
            let factor = list.get(at).copied().unwrap_or(0);
            at += 1;
            let width = element_in(factor, state.edition())
                .filter(|_| factor / 1000 == 31)
                .map(|row| row.width);
            match (factor, width) {
                (31_011 | 31_012, Some(width)) => Count::Once { descriptor: factor, width },
                (_, Some(width)) => Count::Delayed { descriptor: factor, width },
                _ => return Err(format!("replication factor expected, found {factor:06}")),
            }
        };
        let body = list.get(at..at + members).ok_or_else(|| {
            format!("{descriptor:06} replicates {members} descriptors, fewer follow")
        })?;
        let place = self.operations.len();
        self.operations.push(Operation::Loop { count, body: 0 });
        self.list(body, state, depth + 1)?;
        let length = self.operations.len() - place - 1;
        self.operations[place] = Operation::Loop { count, body: length };
        Ok(at + members)
    }

    fn element(&mut self, descriptor: u32, state: &mut State) {
        if let Some(width) = state.local_width.take() {
            self.operations.push(Operation::Skip { width });
            return;
        }
        let Some(row) = element_in(descriptor, state.edition()) else {
            self.operations.push(Operation::Unknown { descriptor });
            return;
        };
        let class = descriptor / 1000;
        if state.reference_width > 0 && class != 31 {
            state.new_references.push(descriptor);
            let width = state.reference_width;
            self.operations.push(Operation::NewReference { descriptor, width });
            return;
        }
        let mut field = Field {
            descriptor,
            kind: row.kind,
            scale: row.scale,
            reference: row.reference,
            width: row.width,
            // Table C, note to 2 04: not applied to class 31.
            associated: if class == 31 { 0 } else { state.associated.iter().sum() },
            new_reference: state.new_references.contains(&descriptor),
        };
        match row.kind {
            Kind::Text if state.text_octets > 0 => field.width = state.text_octets * 8,
            // Table C, 2 01 and 2 02: code and flag tables and characters stay as they are.
            Kind::Number if class != 31 => {
                let increase = state.scale_increase;
                field.scale += state.scale_added + increase;
                field.reference =
                    field.reference.saturating_mul(10_i64.pow(increase.unsigned_abs()));
                let width = i64::from(row.width)
                    + i64::from(state.width_added)
                    + i64::from((10 * increase + 2) / 3);
                field.width = u32::try_from(width.max(0)).unwrap_or(0);
            }
            _ => {}
        }
        self.operations.push(Operation::Element(field));
    }

    fn operator(&mut self, descriptor: u32, state: &mut State) -> Result<(), String> {
        let operand = descriptor % 1000;
        let signed = i32::try_from(operand).unwrap_or(0) - 128;
        match descriptor / 1000 {
            201 => state.width_added = if operand == 0 { 0 } else { signed },
            202 => state.scale_added = if operand == 0 { 0 } else { signed },
            203 => match operand {
                255 => state.reference_width = 0,
                0 => state.new_references.clear(),
                _ => state.reference_width = operand,
            },
            204 if operand == 0 => {
                state.associated.pop();
            }
            204 => state.associated.push(operand),
            205 => self.operations.push(Operation::Skip { width: operand * 8 }),
            206 => state.local_width = Some(operand),
            // Ten to the ninth is the largest increase that any reference value could bear.
            207 if operand <= 9 => state.scale_increase = i32::try_from(operand).unwrap_or(0),
            208 => state.text_octets = operand,
            222..=237 | 241..=243 => self.operations.push(Operation::AboutData),
            _ => return Err(format!("operator {descriptor:06} is not known")),
        }
        Ok(())
    }
}
