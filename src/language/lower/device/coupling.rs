//! Couplings of coils.

use super::*;

impl Lowering<'_> {
    /// `T1 is coupling of L1, L2 with k = k12`
    pub(crate) fn coupling(&mut self, statement: &Statement, scope: &Rc<Scope>) {
        let StatementKind::Is {
            names,
            coils,
            options,
            ..
        } = &statement.kind
        else {
            return;
        };
        let (Some(name), [first, second]) = (names.first(), coils.as_slice()) else {
            self.error(
                statement.place,
                "a coupling joins two coils",
                "write T1 is coupling of L1, L2 with k = k12, one line for each pair",
            );
            return;
        };
        let own = scope.own(&plain(name));
        if !self.enter(&own, What::Coupling, name.place) {
            return;
        }
        let (Some(first_id), Some(second_id)) = (self.coil(first, scope), self.coil(second, scope))
        else {
            return;
        };
        if first_id == second_id {
            self.error(
                second.place,
                "a coil cannot couple to itself",
                "name another coil",
            );
            return;
        }
        let Some(strength) = self.strength(&own, options, scope, statement.place) else {
            return;
        };
        self.builder.symbols().intern(&format!("M_{own}"));
        self.builder.coupling(Coupling {
            name: own,
            first: first_id,
            second: second_id,
            strength,
            place: statement.place,
        });
    }

    pub(super) fn coil(&mut self, name: &Name, scope: &Scope) -> Option<crate::network::ElementId> {
        let own = scope.own(&plain(name));
        match self.names.get(&own).map(|entry| entry.what.clone()) {
            Some(What::Part(id))
                if matches!(self.builder.network().element(id).kind, Kind::Inductor(..)) =>
            {
                Some(id)
            }
            Some(_) => {
                self.error(
                    name.place,
                    format!("{} is no coil", plain(name)),
                    "couplings join inductors",
                );
                None
            }
            None => {
                self.unknown_part(name, scope);
                None
            }
        }
    }

    pub(super) fn strength(
        &mut self,
        own: &str,
        options: &[OptionValue],
        scope: &Rc<Scope>,
        place: Span,
    ) -> Option<Strength> {
        let option = match options {
            [] => None,
            [option] if matches!(plain(&option.name).as_str(), "k" | "M") => Some(option),
            [option, ..] => {
                self.error(
                    option.name.place,
                    "a coupling has one option, k or M",
                    "write with k = k12 or with M = M12",
                );
                return None;
            }
        };
        let is_mutual = option.is_some_and(|option| plain(&option.name) == "M");
        let (letter, dimension) = if is_mutual {
            ("M", Dimension::HENRY)
        } else {
            ("k", Dimension::NUMBER)
        };
        let symbol_name = format!("{letter}_{own}");
        let value = match option.and_then(|option| option.value.as_ref()) {
            None => {
                self.enter(&symbol_name, What::Symbol, place);
                Value::Symbol(self.new_symbol(&symbol_name, Origin::Option, Some(dimension), place))
            }
            Some(given) => {
                let linear = self.linear(given, scope, VALUES).ok()?;
                match linear.constant.as_rational() {
                    Some(number) => Value::Number(number),
                    None => {
                        self.enter(&symbol_name, What::Symbol, place);
                        let symbol =
                            self.new_symbol(&symbol_name, Origin::Option, Some(dimension), place);
                        let text = format!("{symbol_name} = {}", self.spelled(given, scope));
                        self.add_relation(vec![(symbol, linear.constant)], text, None, given.place);
                        Value::Symbol(symbol)
                    }
                }
            }
        };
        if let Value::Number(number) = &value
            && !is_mutual
            && number.abs() > Rational::one()
        {
            self.messages.push(
                Diagnostic::error(place, "the coupling factor is beyond 1")
                    .help("k lies between -1 and 1"),
            );
            return None;
        }
        Some(if is_mutual {
            Strength::Mutual(value)
        } else {
            Strength::Factor(value)
        })
    }
}
