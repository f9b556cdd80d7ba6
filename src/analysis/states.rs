//! State equations with symbolic matrices.
//!
//! The equations are those of the tableau, reduced exactly ([`reduction`]); the states are capacitor
//! voltages and inductor currents as far as they are independent ([`choice`]). What is found is proven
//! by putting it into the equations it came from ([`proof`]) and compared with the nodal equations of
//! the witness at random points.

mod choice;
mod crosscheck;
mod natural;
mod proof;
mod reduction;
mod row;
mod tableau;
mod tree;

use crate::algebra::Fraction;
use crate::analysis::functions::is_wanted;
use crate::analysis::report::states::{
    Affine, Dependent, StateInput, StateMethod, StateSystem, StatesReport,
};
use crate::analysis::report::{Failure, NetworkOrder, Wanted};
use crate::analysis::solve::{Setting, solve};
use crate::budget::Exceeded;
use crate::diagnostic::Diagnostic;
use crate::network::{Ask, Combination, DriveId, ElementId, Kind, Network, Port, Probe, Question};
use choice::Chosen;
use row::{Column, Row};
use tableau::{Acts, Frame, Tableau};

/// Questions that are asked of one and the same network.
struct Group {
    without: Vec<ElementId>,
    across: Option<Port>,
    questions: Vec<usize>,
    /// Order of that network.
    order: u32,
}

/// The state equations of a network and its questions.
pub(super) fn answer(
    setting: &Setting<'_>,
    order: &NetworkOrder,
    wanted: &Wanted,
) -> Result<StatesReport, Failure> {
    let network = setting.network;
    let mut groups = vec![Group {
        without: Vec::new(),
        across: None,
        questions: Vec::new(),
        order: order.network,
    }];
    let mut no_output = Vec::new();
    let mut errors: Vec<Diagnostic> = Vec::new();
    for (index, question) in network.questions().iter().enumerate() {
        if !is_wanted(&question.name, wanted) {
            continue;
        }
        if !is_output(question) {
            no_output.push(index);
            continue;
        }
        let degrees = match solve(setting, question)? {
            Some(Ok(solved)) => solved.degrees,
            Some(Err(error)) => {
                errors.push(*error);
                continue;
            }
            None => continue,
        };
        let mut without = question.without.clone();
        without.sort_unstable();
        let across = match question.ask {
            Ask::Admittance(port) => Some(port),
            _ => None,
        };
        let known = groups
            .iter_mut()
            .find(|group| group.without == without && group.across == across);
        match known {
            Some(group) => group.questions.push(index),
            None => groups.push(Group {
                without,
                across,
                questions: vec![index],
                order: degrees.network,
            }),
        }
    }
    if !errors.is_empty() {
        return Err(Failure::Unusable(errors));
    }
    let systems = groups
        .iter()
        .enumerate()
        .map(|(index, group)| system(setting, group, index == 0))
        .collect::<Result<_, _>>()?;
    Ok(StatesReport { systems, no_output })
}

fn is_output(question: &Question) -> bool {
    matches!(
        question.ask,
        Ask::Transfer { .. } | Ask::Impedance(_) | Ask::Admittance(_)
    )
}

/// What acts in a group: in the network itself every source, elsewhere what is asked.
fn acts(network: &Network, group: &Group, main: bool) -> Vec<Acts> {
    let mut list: Vec<Acts> = Vec::new();
    if main {
        let followed = |drive: &DriveId| {
            network.elements().any(|(_, element)| match &element.kind {
                Kind::Source(source) => source.drives.iter().any(|it| it.drive == *drive),
                _ => false,
            })
        };
        let drives = (0..network.drives().len()).map(DriveId::at);
        list.extend(drives.filter(followed).map(Acts::Drive));
    }
    for &question in &group.questions {
        let needed = match &network.questions()[question].ask {
            Ask::Transfer { drive, .. } => Acts::Drive(*drive),
            Ask::Impedance(port) => Acts::CurrentInto(*port),
            Ask::Admittance(port) => Acts::VoltageAcross(*port),
            _ => continue,
        };
        if !list.contains(&needed) {
            list.push(needed);
        }
    }
    if main {
        list.extend((0..network.starts().len()).map(Acts::Start));
    }
    list
}

/// A system with everything over the chosen states.
struct Found {
    frame: Frame,
    chosen: Chosen,
    /// Each output over states and inputs.
    outputs: Vec<Row>,
}

fn system(setting: &Setting<'_>, group: &Group, main: bool) -> Result<StateSystem, Failure> {
    let network = setting.network;
    let budget = setting.budget;
    let frame = Frame {
        without: group.without.clone(),
        acts: acts(network, group, main),
    };
    let tableau = tableau::write(setting, &frame)?;
    let rank = |equation: usize| rank_of(network, tableau.owner[equation]);
    let origins = reduction::origins(&tableau.equations, &rank);
    let reduced = reduction::reduce(&tableau.equations, &origins, budget)?;
    let disagreed = |what: &str| Failure::Witness(format!("{what} of the state equations"));
    let reduced = reduced.ok_or_else(|| disagreed("the determinant"))?;
    let chosen = choice::choose(network, &tableau, &origins, reduced, budget)?;
    if chosen.rates.len() != group.order as usize {
        return Err(disagreed("the order"));
    }
    if !proof::holds(&tableau, &chosen, budget)? {
        return Err(disagreed("the proof"));
    }
    let mut outputs = Vec::new();
    for &question in &group.questions {
        let row = response(setting, &tableau, &network.questions()[question].ask)?;
        outputs.push(chosen.put_into(&row, budget)?);
    }
    let found = Found {
        frame,
        chosen,
        outputs,
    };
    let checked_points = crosscheck::agree(setting, group, &found).map_err(Failure::Witness)?;
    if main && !crosscheck::natural(setting, &found)? {
        return Err(disagreed("the natural frequencies"));
    }
    written(setting, group, &found, main, checked_points).map_err(Failure::from)
}

/// Capacitors first, then inductors, then what stands inside parts.
fn rank_of(network: &Network, owner: Option<ElementId>) -> u8 {
    match owner.map(|id| &network.element(id).kind) {
        Some(Kind::Capacitor(..)) => 0,
        Some(Kind::Inductor(..)) => 1,
        _ => 2,
    }
}

/// What a question reads, over the unknowns.
fn response(setting: &Setting<'_>, tableau: &Tableau, ask: &Ask) -> Result<Row, Exceeded> {
    let budget = setting.budget;
    let combined = |combination: &Combination| -> Result<Row, Exceeded> {
        let mut row = Row::default();
        for (coefficient, probe) in &combination.terms {
            let value = setting.rooted.apply(coefficient, budget)?;
            let value = value.unwrap_or_else(Fraction::zero);
            match probe {
                Probe::Voltage(port) => row.add_scaled(&tableau::voltage(*port), &value, budget)?,
                Probe::Current(part) => {
                    if let Some(&current) = tableau.current.get(part) {
                        row.add(Column::Unknown(current), &value, budget)?;
                    }
                }
            }
        }
        Ok(row)
    };
    match ask {
        Ask::Transfer { response, .. } => combined(response),
        Ask::Impedance(port) => Ok(tableau::voltage(*port)),
        Ask::Admittance(_) => {
            let mut row = Row::default();
            if let Some(current) = tableau.probe {
                row.add(Column::Unknown(current), &Fraction::one().neg(), budget)?;
            }
            Ok(row)
        }
        _ => Ok(Row::default()),
    }
}

/// Everything as matrices, in symbols of the file.
fn written(
    setting: &Setting<'_>,
    group: &Group,
    found: &Found,
    main: bool,
    checked_points: u32,
) -> Result<StateSystem, Exceeded> {
    let network = setting.network;
    let writer = Writer { setting, found };
    let inputs: Vec<StateInput> = found
        .frame
        .acts
        .iter()
        .filter_map(|acts| match acts {
            Acts::Drive(drive) => Some(StateInput::Drive(*drive)),
            Acts::CurrentInto(port) => Some(StateInput::CurrentInto(*port)),
            Acts::VoltageAcross(port) => Some(StateInput::VoltageAcross(*port)),
            Acts::Start(_) => None,
        })
        .collect();
    let rates: Vec<Affine> = writer.all(&found.chosen.rates)?;
    let outputs: Vec<Affine> = writer.all(&found.outputs)?;
    let (a, b) = matrices(rates, inputs.len());
    let (c, d) = matrices(outputs, inputs.len());
    let mut dependent = Vec::new();
    for (quantity, row) in &found.chosen.dependent {
        dependent.push(Dependent {
            quantity: *quantity,
            equals: writer.affine(row)?,
        });
    }
    let start = match main && !network.starts().is_empty() {
        true => Some(natural::start(&writer)?),
        false => None,
    };
    Ok(StateSystem {
        without: group.without.clone(),
        inputs,
        vector: found.chosen.vector.clone(),
        dependent,
        outputs: group.questions.clone(),
        a,
        b,
        c,
        d,
        method: tree::normal_tree(network, group, &found.chosen.vector)
            .map_or(StateMethod::Pencil, StateMethod::NormalTree),
        start,
        checked_points,
    })
}

type Matrix = Vec<Vec<Fraction>>;

/// Coefficients of states, and one matrix for each derivative of the inputs; at least one.
fn matrices(rows: Vec<Affine>, inputs: usize) -> (Matrix, Vec<Matrix>) {
    let most = rows
        .iter()
        .map(|row| row.inputs.len())
        .max()
        .unwrap_or(0)
        .max(1);
    let by_power = (0..most)
        .map(|power| {
            let row = |row: &Affine| {
                let none = || vec![Fraction::zero(); inputs];
                row.inputs.get(power).cloned().unwrap_or_else(none)
            };
            rows.iter().map(row).collect()
        })
        .collect();
    let states = rows.into_iter().map(|row| row.states).collect();
    (states, by_power)
}

/// Rows over states and inputs as they are reported.
struct Writer<'a> {
    setting: &'a Setting<'a>,
    found: &'a Found,
}

impl Writer<'_> {
    /// A coefficient without roots of inductances.
    fn fraction(&self, value: &Fraction) -> Result<Fraction, Exceeded> {
        let (above, below) = self
            .setting
            .couplings
            .written(value.numerator(), value.denominator());
        let written = Fraction::new(above, below, self.setting.budget)?;
        Ok(written.unwrap_or_else(Fraction::zero))
    }

    /// Number of inputs that are reported; starting values stand behind them.
    fn inputs(&self) -> usize {
        let acts = &self.found.frame.acts;
        acts.iter()
            .filter(|it| !matches!(it, Acts::Start(_)))
            .count()
    }

    /// Starting values are left out.
    fn affine(&self, row: &Row) -> Result<Affine, Exceeded> {
        let (states, inputs) = (self.found.chosen.rates.len(), self.inputs());
        let mut affine = Affine {
            states: vec![Fraction::zero(); states],
            inputs: Vec::new(),
            constant: Fraction::zero(),
        };
        for (&column, value) in &row.0 {
            let value = self.fraction(value)?;
            match column {
                Column::State(state) => affine.states[state] = value,
                Column::Input { input, power } if input < inputs => {
                    while affine.inputs.len() <= power as usize {
                        affine.inputs.push(vec![Fraction::zero(); inputs]);
                    }
                    affine.inputs[power as usize][input] = value;
                }
                Column::Input { .. } | Column::Unknown(_) => {}
            }
        }
        Ok(affine)
    }

    fn all(&self, rows: &[Row]) -> Result<Vec<Affine>, Exceeded> {
        rows.iter().map(|row| self.affine(row)).collect()
    }
}
