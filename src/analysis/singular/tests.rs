use super::*;
use crate::network::oracle::degrees;
use crate::network::scatter::{Dice, active, passive};
use crate::network::sketch::Sketch;

fn case(network: &Network) -> Case<'_> {
    Case {
        network,
        without: &[],
        touched: &[],
        short: None,
        met: &[],
        question: None,
    }
}

#[test]
fn an_output_that_no_equation_feels() {
    let parts = "Vs in ground; R1 in a; R2 a x; R3 x out; R4 a ground; RL out ground";
    let sketch = Sketch::of(parts)
        .opamp("U2", "in", "x", "x")
        .opamp("U1", "a", "ground", "out");
    let network = sketch.finish();
    assert!(faults(&network, &[], &[]).is_empty());
    assert_eq!(degrees(&network, &[], 1), None);
    let found = explain(&case(&network));
    assert_eq!(
        found.message,
        "no unique solution: too few equations for the voltage of node out and the currents of \
         U2 and U1"
    );
    assert!(found.help.unwrap().starts_with("an ideal opamp"));
}

#[test]
fn parts_taken_out_are_named() {
    let sketch = Sketch::of("Vs in ground; R1 in a; R2 a b; R3 b a");
    let without = [sketch.id("R1")];
    let network = sketch.finish();
    let (from, to) = (NodeId::at(2), NodeId::GROUND);
    let found = explain(&Case {
        without: &without,
        touched: &[Port { from, to }],
        ..case(&network)
    });
    assert_eq!(
        found.message,
        "nodes a and b (R2 and R3) have no conducting path to ground (with R1 taken out)"
    );
}

#[test]
fn parts_met_are_named_when_the_pattern_is_sound() {
    let sketch = Sketch::of("Vs in ground; R1 in a; R2 a ground");
    let met = [sketch.id("Vs")];
    let network = sketch.finish();
    let found = explain(&Case {
        met: &met,
        ..case(&network)
    });
    assert!(found.message.contains("the equations of Vs repeat"));
}

/// Too few equations are never claimed where there is a solution.
#[test]
fn the_pattern_of_a_solvable_network_is_complete() {
    let (mut told, mut untold) = (0, 0);
    for seed in 0..4000 {
        for network in [
            active(&mut Dice(seed << 20)).finish(),
            passive(&mut Dice(seed << 21)).finish(),
        ] {
            let found = too_few_equations(&case(&network));
            if degrees(&network, &[], seed).is_some() {
                assert!(found.is_none(), "seed {seed}: {found:?}");
            } else if faults(&network, &[], &[]).is_empty() {
                told += usize::from(found.is_some());
                untold += usize::from(found.is_none());
            }
        }
    }
    assert!(told > untold, "{told} {untold}");
}
