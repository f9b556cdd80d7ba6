//! The typed tree of a source text, with the place of everything.

use crate::algebra::Rational;
use crate::network::{CancellationClass, Dimension, Side};
use crate::source::Span;

/// A name that may hold braces to be filled in by repetition: `n{k-1}`.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Name {
    /// Text and braces in turn.
    pub parts: Vec<NamePart>,
    /// Where.
    pub place: Span,
}

/// A piece of a name.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum NamePart {
    /// Letters, digits, dots.
    Text(String),
    /// A whole-number expression in braces.
    Brace(Whole),
}

/// A whole-number expression over `let` and `for` names.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Whole {
    /// A number.
    Number(i64, Span),
    /// A name.
    Name(String, Span),
    /// Sum.
    Add(Box<Whole>, Box<Whole>),
    /// Difference.
    Sub(Box<Whole>, Box<Whole>),
    /// Product.
    Mul(Box<Whole>, Box<Whole>),
}

/// A literal number with its unit.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Literal {
    /// Value in SI units (per cent and decibel resolved).
    pub value: Rational,
    /// Dimension of a stated unit.
    pub dimension: Option<Dimension>,
    /// Stated in hertz.
    pub in_hertz: bool,
    /// Stated in per cent.
    pub percent: bool,
    /// The unit or prefix as written, when it could also be a name.
    pub suffix: Option<Box<Suffix>>,
    /// A decibel value that is no multiple of 20 and was rounded.
    pub rounded: bool,
    /// Where.
    pub place: Span,
}

/// The letters behind a number.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Suffix {
    /// As written.
    pub text: String,
    /// In words: `2 seconds`.
    pub reading: String,
    /// The number without them.
    pub number: String,
}

/// An expression.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Expression {
    /// What it is.
    pub node: ExpressionNode,
    /// Where.
    pub place: Span,
}

/// The kinds of expression.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum ExpressionNode {
    /// A number.
    Number(Literal),
    /// A name.
    Name(Name),
    /// `voltage(a)`, `voltage(a, b)`.
    Voltage(Vec<Name>),
    /// `current(R1)`.
    Current(Name),
    /// −x
    Negate(Box<Expression>),
    /// Sum of signed terms; `true` is minus.
    Sum(Vec<(bool, Expression)>),
    /// Product of factors; `true` divides.
    Product(Vec<(bool, Expression)>),
    /// x ∥ y ∥ …
    Parallel(Vec<Expression>),
    /// x^n
    Power(Box<Expression>, i32),
}

/// A nominal value or range in the parts list.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct PartValue {
    /// Nominal.
    pub nominal: Option<Literal>,
    /// Deviation of the nominal.
    pub deviation: Option<Deviation>,
    /// Range.
    pub range: Option<(Literal, Literal)>,
    /// Where.
    pub place: Span,
}

/// A tolerance as written.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Deviation {
    /// Upwards.
    pub up: Literal,
    /// Downwards.
    pub down: Literal,
}

/// A statement with its place.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Statement {
    /// What it says.
    pub kind: StatementKind,
    /// Where.
    pub place: Span,
}

/// All statements.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum StatementKind {
    /// `title "…"`
    Title(String),
    /// `use "…"`
    Use(String, Span),
    /// `let N = 5`
    Let(Name, Whole),
    /// `for k = 1 .. N` with its body.
    For {
        /// The name that counts.
        name: Name,
        /// First value.
        from: Whole,
        /// Last value.
        to: Whole,
        /// What is repeated.
        body: Vec<Statement>,
    },
    /// `module name(ports) with parameters` with its body.
    Module(Module),
    /// A path.
    Path(Vec<Name>, Vec<Link>),
    /// `R1, R2 : 10 kΩ`
    Parts(Vec<Listed>, Box<PartValue>),
    /// `a = b = expression`
    Relation {
        /// Names that are set.
        left: Vec<Name>,
        /// Value.
        right: Expression,
        /// `exactly`.
        exactly: bool,
        /// `± 0.1 %`.
        deviation: Option<Deviation>,
    },
    /// `name is kind(…) with …`
    Is {
        /// Names.
        names: Vec<Name>,
        /// Kind, device or module.
        kind: Name,
        /// Terminals in parentheses.
        terminals: Option<Vec<Terminal>>,
        /// Coils of a coupling.
        coils: Vec<Name>,
        /// Options.
        options: Vec<OptionValue>,
    },
    /// `free a, b …`
    Free {
        /// Names.
        names: Vec<Name>,
        /// Nominal, tolerance, range.
        value: Option<Box<PartValue>>,
        /// `real`.
        real: bool,
        /// `in a .. b`.
        within: Option<(Literal, Literal)>,
    },
    /// `drive Vd`
    Drive(Vec<Name>),
    /// `assume a < b < c`
    Assume(Expression, Vec<(Compare, Expression)>),
    /// `derive H = …`
    Derive {
        /// Name.
        name: Name,
        /// Question.
        question: Asked,
        /// Parts taken out.
        without: Vec<Name>,
        /// Text right of the `=`.
        text: String,
    },
    /// `claim …`
    Claim(Claimed, String),
    /// `starts voltage(C1) = V0`
    Starts {
        /// Part.
        part: Name,
        /// Voltage or current.
        is_voltage: bool,
        /// Value.
        value: Expression,
    },
}

/// A module.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Module {
    /// Name.
    pub name: Name,
    /// Ports.
    pub ports: Vec<Name>,
    /// Parameters.
    pub parameters: Vec<Parameter>,
    /// Statements.
    pub body: Vec<Statement>,
    /// Where its head stands.
    pub place: Span,
}

/// A parameter of a module.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Parameter {
    /// Name.
    pub name: Name,
    /// Default.
    pub default: Option<Expression>,
    /// `exactly`.
    pub exactly: bool,
}

/// Between two nodes of a path.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Link {
    /// `--`
    Join,
    /// `-part-`
    Part(Group),
}

/// Parts between two nodes.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Group {
    /// A designator with its value in place.
    One(Name, Option<Box<PartValue>>),
    /// `||`
    Parallel(Vec<Group>),
    /// `+`
    Series(Vec<Group>),
}

/// A name in the parts list.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Listed {
    /// One.
    One(Name),
    /// `R1 .. R8`
    Span(Name, Name),
}

/// A terminal of a device.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Terminal {
    /// Its name.
    pub name: String,
    /// The node; its own name where none is given.
    pub node: Option<Name>,
    /// Where.
    pub place: Span,
}

/// An option.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct OptionValue {
    /// Name.
    pub name: Name,
    /// Value; without one the option is a symbol of its own.
    pub value: Option<Expression>,
    /// `exactly`.
    pub exactly: bool,
}

/// Comparison signs.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Compare {
    /// `<`
    Less,
    /// `<=`
    LessOrEqual,
    /// `>`
    Greater,
    /// `>=`
    GreaterOrEqual,
}

/// What a derive line asks, before names are resolved.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Asked {
    /// `impedance(a, b)`
    Impedance(Vec<Name>),
    /// `admittance(a, b)`
    Admittance(Vec<Name>),
    /// `ratio(x, y) with Vs`
    Ratio(Expression, Expression, Name),
    /// `return_ratio(U1)`
    ReturnRatio(Name),
    /// `first_order(H, 1/A0)`
    FirstOrder(Name, Expression),
    /// `H with A0 -> infinite`
    Limit(Name, Vec<(Name, Option<Expression>)>),
    /// A response over a drive, or a function of functions.
    Expression(Expression),
}

/// What a claim line claims.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Claimed {
    /// `H = …`
    Equals(Name, Expression),
    /// `order(X) = n`
    Order(Name, Expression),
    /// `static(network) = n`
    Static(Name, Expression),
    /// `dc(H) = …`; `None` is infinite.
    Dc(Name, Option<Expression>),
    /// `hf(H) = …`
    Hf(Name, Option<Expression>),
    /// `coefficient(H, den, k) = …`
    Coefficient(Name, Side, u32, Expression),
    /// `pole(H) = …`
    Pole(Name, Expression),
    /// `zero(H) = …`
    Zero(Name, Expression),
    /// `same(H1, H2)`
    Same(Name, Name),
    /// `cancels(H) = …`
    Cancels(Name, Vec<CancellationClass>),
    /// `stable(X)`
    Stable(Name, bool),
}
