//! From the tree of a statement to its sketch.
//!
//! One walk over the factors of every term. Here stand the trade's habits of writing that need no vote: what
//! matches anything, what is a function's argument, what flips below a line, what binds.

use compact_str::CompactString;
use indexwise_grammar::tree::{
    Atom, Big, Bracket, Factor, Group, Item, ItemKind, Joint, Kernel, Level, Statement, Sum, Term,
};

use crate::conventions::built_in::{is_basis_kernel, is_derivative};

use super::builder::Builder;
use super::doubts::{NAME_DOUBT, cast_doubts, listed_coordinates};
use super::draft::{Node, TermNode, add_side};
use super::habits::{
    argument_odds, is_differential, is_lone_derivative, is_lone_kernel, is_number, is_numeric, is_scalar_product,
    is_zero, letters_of, matches_anything,
};
use super::scripts::{Carrier, Power, read_scripts};
use super::{Bound, Shape, Sketch, Switch};

/// Price of taking several parts in a bracket for components rather than arguments or a commutator.
const LIST_PRICE: i32 = 10;
/// Price of taking a function of a component by component, so that its indices are not summed with others.
const FUNCTION_PRICE: i32 = 15;
/// Price of taking `\psi(p)` for the value of a map, with whatever indices.
const MAP_PRICE: i32 = 30;

pub(super) fn sketch(statement: &Statement) -> Sketch {
    let mut builder = Builder::default();
    builder.sketch.span = statement.span;
    builder.sketch.relations = statement.relations.iter().map(|relation| relation.kind).collect();
    for side in &statement.sides {
        let terms: Vec<TermNode> = side.terms.iter().map(|term| builder.term(term, false)).collect();
        add_side(&mut builder.sketch, side.span, &terms, is_zero(side));
    }
    let mut sketch = builder.sketch;
    cast_doubts(&mut sketch, &builder.named, &builder.counters);
    sketch.coordinates = listed_coordinates(statement);
    if sketch.relations.is_empty() && sketch.sides.iter().all(|side| side.any) {
        sketch.unjudged = sketch.unjudged.or(Some("nothing to compare"));
    }
    if statement.relations.iter().any(|relation| relation.sign.contains('?')) {
        sketch.unjudged = sketch.unjudged.or(Some("the author asks whether it holds"));
    }
    sketch.settle();
    sketch
}

impl Builder {
    fn term(&mut self, term: &Term, flip: bool) -> TermNode {
        let places = self.sketch.places.len();
        let mut walk = Walk { factors: &term.factors, any: matches_anything(term), ..Walk::of(flip) };
        while let Some(factor) = term.factors.get(walk.at) {
            walk.at += 1;
            self.factor(&mut walk, factor);
        }
        let bare = self.sketch.places.len() == places;
        let (any, shorthand) = (walk.any, bare && walk.vector && !is_scalar_product(term));
        let number = !term.factors.is_empty() && term.factors.iter().all(is_numeric);
        TermNode { span: term.span, nodes: walk.nodes, any, loose: walk.loose, number, shorthand, opaque: walk.opaque }
    }

    fn factor(&mut self, walk: &mut Walk<'_>, factor: &Factor) {
        if factor.joint == Joint::Slash {
            walk.below = 1 + usize::from(is_differential(factor));
        }
        // Sets and maps are named, not summed.
        walk.any |= matches!(factor.joint, Joint::Set(_));
        let flip = walk.flip != (walk.below > 0);
        walk.below = walk.below.saturating_sub(1);
        match &factor.atom {
            Atom::Kernel(kernel) => self.kernel(walk, factor, kernel, flip),
            Atom::Group(group) => self.group(walk, factor, group, flip),
            Atom::Fraction(fraction) => {
                let over = self.sketch.places.len();
                self.inline(walk, &fraction.over, flip);
                let under = self.sketch.places.len();
                self.inline(walk, &fraction.under, !flip);
                self.note_ratio(over, under);
            }
            Atom::Root(root) => self.inline(walk, &root.body, flip),
            Atom::Labelled(sum) => self.inline(walk, sum, flip),
            // `\{{}^\alpha_{\mu\nu}\}`: scripts on nothing are a symbol in its bracket.
            Atom::Wrapped(sum) if sum.terms.is_empty() => {
                if walk.factors.len() == 1 {
                    let carrier = Carrier { group: false, ..Carrier::BRACKET };
                    let scripts = read_scripts(self, carrier, &factor.scripts, flip);
                    walk.nodes.extend(scripts.nodes);
                }
            }
            Atom::Wrapped(sum) => {
                let node = self.sum_node(walk, sum, flip);
                self.scripted_group(walk, factor, node, flip);
            }
            Atom::Big(Big::Sum | Big::Limit, _) => self.bind(walk, factor),
            Atom::Big(Big::Integral, _) | Atom::Number(_) | Atom::Unread(_) => {}
            Atom::Function(name) => self.function(walk, name, flip),
            Atom::Unknown(name, arguments) => self.unknown(walk, factor, name, arguments, flip),
            // Zero takes any indices.
            Atom::Struck(_) => walk.any = true,
            Atom::Matrix | Atom::Text(_) | Atom::Dots | Atom::Order(_) => walk.any = true,
        }
    }

    fn kernel(&mut self, walk: &mut Walk<'_>, factor: &Factor, kernel: &Kernel, flip: bool) {
        if walk.order_of(kernel, factor) {
            walk.any = true;
            walk.at += 1;
            return;
        }
        let frame = kernel.letter == "e" && !factor.scripts.is_empty();
        let bare = factor.scripts.is_empty() && matches!(kernel.letter.as_str(), "\\partial" | "\\Gamma" | "D");
        walk.vector |= kernel.bold || kernel.letter == "\\nabla" || frame || bare;
        let carrier = Carrier { name: &kernel.name, letter: &kernel.letter, bold: kernel.bold, group: false };
        let scripts = read_scripts(self, carrier, &factor.scripts, flip);
        // `I_3` is not I.
        let numbered =
            factor.scripts.iter().flat_map(|script| &script.items).any(|item| matches!(item.kind, ItemKind::Number(_)));
        if scripts.nodes.is_empty() && !kernel.word && !(numbered && scripts.power.is_none()) {
            self.sketch.quantities.push((kernel.letter.clone(), factor.span));
        }
        let indexed = !scripts.nodes.is_empty();
        self.powered(walk, Node::Product(scripts.nodes), scripts.power);
        self.arguments(walk, kernel, indexed);
    }

    /// Pushes a node under its power.
    fn powered(&mut self, walk: &mut Walk<'_>, node: Node, power: Option<Power>) {
        let empty = match &node {
            Node::Product(nodes) => nodes.is_empty(),
            Node::Sum(terms) => terms.iter().all(|term| term.nodes.is_empty()),
            _ => false,
        };
        if empty {
            return;
        }
        walk.nodes.push(match power {
            None => match node {
                Node::Product(nodes) => return walk.nodes.extend(nodes),
                node => node,
            },
            Some(Power::Square) => Node::Square(Box::new(node), self.switch(Switch::new(true, 0))),
            Some(Power::Other) => Node::Power(Box::new(node)),
        });
    }

    /// A bracket right after a kernel: an argument, a factor, or whichever balances.
    fn arguments(&mut self, walk: &mut Walk<'_>, kernel: &Kernel, indexed: bool) {
        while let Some(next) = walk.factors.get(walk.at) {
            let Atom::Group(group) = &next.atom else { return };
            if next.joint != Joint::Beside || group.parts.is_empty() || is_derivative(&kernel.letter) {
                return;
            }
            // Components with a coefficient: `u^t (1, 0, 0, \Omega)`.
            if group.parts.len() > 1 && group.parts.iter().any(is_number) {
                walk.at += 1;
                walk.any = true;
                return;
            }
            let Some((on, price)) = argument_odds(kernel, group, indexed) else { return };
            let own = self.sketch.places.len();
            walk.at += 1;
            let nodes =
                group.parts.iter().flat_map(|part| &part.sides).map(|side| self.sum_only(side, walk.flip)).collect();
            let sum = group.parts.iter().flat_map(|part| &part.sides).any(|side| side.terms.len() > 1);
            let on = on || indexed && sum && self.contracts(own);
            let switch = self.switch(Switch { on, price, lends: !on });
            let map = walk.factors.len() == 2 && !on || group.parts.len() > 1;
            if walk.at == walk.factors.len() && !indexed && walk.loose.is_none() && map {
                // The value of a map, or components with a coefficient.
                let price = if group.parts.len() > 1 { LIST_PRICE } else { MAP_PRICE };
                walk.loose = Some(self.switch(Switch::new(false, price)));
            }
            self.scripted_group(walk, next, Node::Argument(switch, Box::new(Node::Product(nodes))), walk.flip);
            if indexed {
                return;
            }
        }
    }

    fn group(&mut self, walk: &mut Walk<'_>, factor: &Factor, group: &Group, flip: bool) {
        // An evaluation bar, or a condition in brackets: nothing of the term.
        if group.parts.is_empty() {
            return self.bar(walk, factor, flip);
        }
        if group.parts.iter().any(|part| !part.relations.is_empty()) {
            // `- (\mu \leftrightarrow \nu)`: another term like the one before.
            walk.any |= walk.factors.len() == 1;
            return;
        }
        if group.parts.len() > 1 {
            return self.list(walk, factor, group, flip);
        }
        let Some(sum) = group.parts.first().and_then(|part| part.sides.first()) else { return };
        let before = self.sketch.places.len();
        let mut node = self.sum_node(walk, sum, flip);
        let items = factor.scripts.iter().flat_map(|script| &script.items);
        let lettered = items.filter(|item| matches!(item.kind, ItemKind::Letter(_))).count();
        // Two letters outside are the slots of a matrix, `(T^a)_{bc}`.
        if is_lone_kernel(sum) && lettered == 1 {
            self.doubt_name(before);
        }
        let names = is_lone_kernel(sum) || group.bracket == Bracket::Square;
        if walk.factors.len() == 1 && names && factor.scripts.is_empty() {
            // `(a_{ij})` alone names the matrix, `[T_{ij}]` the dimension.
            let switch = self.switch(Switch::new(true, 0));
            node = Node::Switch(switch, Box::new(node));
        }
        if group.bracket == Bracket::Bars && is_lone_derivative(sum) {
            // `|\partial F^i / \partial x^j|` is a determinant.
            let switch = self.switch(Switch::new(true, 0));
            node = Node::Switch(switch, Box::new(node));
        }
        // `\langle \theta_j \rangle_{|r_i - r_j| < r}`: a mean under a condition.
        let relation = |item: &Item| matches!(item.kind, ItemKind::Relation(_));
        walk.any |= group.bracket == Bracket::Angle
            && factor.scripts.iter().any(|script| script.items.len() > 1 && script.items.iter().any(relation));
        if matches!(group.bracket, Bracket::Bars | Bracket::Angle) {
            let scripts = read_scripts(&mut Builder::default(), Carrier::BRACKET, &factor.scripts, flip);
            return self.powered(walk, node, scripts.power);
        }
        self.scripted_group(walk, factor, node, flip);
    }

    /// Whether the places from a number on share a letter with the script right before them.
    fn contracts(&self, from: usize) -> bool {
        let (before, inside) = self.sketch.places.split_at(from.min(self.sketch.places.len()));
        let kernel = before.last().map(|place| place.unit).and_then(|unit| self.sketch.units.get(unit as usize));
        let mut own = before.iter().rev().take_while(|place| {
            self.sketch.units.get(place.unit as usize).map(|unit| &unit.kernel) == kernel.map(|unit| &unit.kernel)
        });
        own.any(|place| inside.iter().any(|other| other.letter == place.letter))
    }

    /// A lone bar evaluates, or it differentiates covariantly: `m^{\alpha\beta}|_\beta`.
    fn bar(&mut self, walk: &mut Walk<'_>, factor: &Factor, flip: bool) {
        let scripts = read_scripts(self, Carrier::BRACKET, &factor.scripts, flip);
        if !scripts.nodes.is_empty() && walk.at > 1 {
            let switch = self.switch(Switch::new(true, 0));
            walk.nodes.push(Node::Switch(switch, Box::new(Node::Product(scripts.nodes))));
        }
    }

    /// Several parts in a bracket: a commutator multiplies them, a list in round brackets spells components out.
    fn list(&mut self, walk: &mut Walk<'_>, factor: &Factor, group: &Group, flip: bool) {
        let components =
            group.bracket == Bracket::Square && (group.parts.len() > 2 || group.parts.iter().any(is_number));
        if matches!(group.bracket, Bracket::Round | Bracket::Bars) || components {
            walk.any = true;
            return;
        }
        let mut nodes = Vec::new();
        let mut indexed = 0;
        for side in group.parts.iter().flat_map(|part| &part.sides) {
            let before = self.sketch.places.len();
            nodes.push(self.sum_only(side, flip));
            indexed += usize::from(self.sketch.places.len() > before);
        }
        if group.bracket == Bracket::Square && walk.factors.len() == 1 && indexed < nodes.len() {
            // A commutator by itself, or a list of components.
            walk.loose = Some(self.switch(Switch::new(false, LIST_PRICE)));
        }
        let node = if group.bracket == Bracket::Curly {
            let switch = self.switch(Switch::new(true, 0));
            Node::Switch(switch, Box::new(Node::Product(nodes)))
        } else {
            Node::Product(nodes)
        };
        self.scripted_group(walk, factor, node, flip);
    }

    /// `\delta\nu_\alpha / \nu_\alpha`: the same kernel with the same letter above and below is one of several
    /// things with a name, not a sum.
    fn note_ratio(&mut self, over: usize, under: usize) {
        let lone = |place: &super::Place| {
            let unit = self.sketch.units.get(place.unit as usize)?;
            (unit.shape == Shape::Lone).then(|| (unit.kernel_letter.clone(), unit.letter.clone()))
        };
        let above: Vec<_> = self.sketch.places.get(over..under).unwrap_or_default().iter().filter_map(lone).collect();
        let below = self.sketch.places.get(under..).unwrap_or_default().iter().filter_map(lone);
        let named: Vec<CompactString> = below.filter(|one| above.contains(one)).map(|(_, letter)| letter).collect();
        self.named.extend(named);
    }

    /// `(\partial_k)^i` is a component of the vector named `\partial_k`: a lone letter inside is part of the name.
    fn doubt_name(&mut self, from: usize) {
        if let [place] = self.sketch.places.get(from..).unwrap_or_default()
            && let Some(unit) = self.sketch.units.get_mut(place.unit as usize)
        {
            unit.bias -= NAME_DOUBT;
        }
    }

    fn scripted_group(&mut self, walk: &mut Walk<'_>, factor: &Factor, node: Node, flip: bool) {
        let scripts = read_scripts(self, Carrier::BRACKET, &factor.scripts, flip);
        self.powered(walk, node, scripts.power);
        walk.nodes.extend(scripts.nodes);
    }

    /// Numerator, denominator, radicand: a sum of its own, like one in brackets.
    fn inline(&mut self, walk: &mut Walk<'_>, sum: &Sum, flip: bool) {
        let node = self.sum_node(walk, sum, flip);
        walk.nodes.push(node);
    }

    fn sum_node(&mut self, walk: &mut Walk<'_>, sum: &Sum, flip: bool) -> Node {
        let terms: Vec<TermNode> = sum.terms.iter().map(|term| self.term(term, flip)).collect();
        walk.any |= matches!(terms.as_slice(), [term] if term.any) && !is_zero(sum);
        walk.vector |= matches!(terms.as_slice(), [term] if term.shorthand);
        Node::Sum(terms)
    }

    /// As `sum_node`, where a part that matches anything does not spoil the term around it.
    fn sum_only(&mut self, sum: &Sum, flip: bool) -> Node {
        Node::Sum(sum.terms.iter().map(|term| self.term(term, flip)).collect())
    }

    /// A command that nobody knows: with one argument it decorates it, with several they are factors, with none it is
    /// a kernel. Whether that can be trusted the document decides (`inferred.rs`).
    fn unknown(&mut self, walk: &mut Walk<'_>, factor: &Factor, name: &CompactString, arguments: &[Sum], flip: bool) {
        let kernel = match arguments {
            [] => Some(None),
            [Sum { terms, .. }] => match terms.as_slice() {
                [Term { factors, .. }] => match factors.as_slice() {
                    [Factor { atom: Atom::Kernel(kernel), scripts, .. }] if scripts.is_empty() => Some(Some(kernel)),
                    _ => None,
                },
                _ => None,
            },
            _ => None,
        };
        // A command on one letter is a type or a decoration; anything else the document must speak for.
        if !matches!(kernel, Some(Some(_))) {
            self.sketch.unknown.push(name.clone());
        }
        if let Some(kernel) = kernel {
            let full =
                kernel.map_or_else(|| name.clone(), |kernel| compact_str::format_compact!("\\{name} {}", kernel.name));
            let letter = kernel.map_or(name, |kernel| &kernel.letter);
            let carrier = Carrier { name: &full, letter, bold: false, group: false };
            let carrier = Carrier { bold: kernel.is_some() && is_basis_kernel(letter), ..carrier };
            let scripts = read_scripts(self, carrier, &factor.scripts, flip);
            walk.vector |= scripts.nodes.is_empty();
            // It may print indices of its own.
            walk.opaque |= kernel.is_none() && scripts.nodes.is_empty();
            return self.powered(walk, Node::Product(scripts.nodes), scripts.power);
        }
        for argument in arguments {
            self.inline(walk, argument, flip);
        }
        let scripts = read_scripts(self, Carrier::BRACKET, &factor.scripts, flip);
        walk.nodes.extend(scripts.nodes);
    }

    /// `\det`, `\operatorname{tr}` name a matrix by its components; other functions take an ordinary factor.
    fn function(&mut self, walk: &mut Walk<'_>, name: &str, flip: bool) {
        match name {
            "diag" | "const" => walk.any = true,
            "det" | "tr" | "Tr" | "trace" | "Trace" | "rank" | "rk" | "dim" | "ker" | "adj" | "cof" | "sym"
            | "skew" | "dev" | "determinant" | "Det" | "span" | "Span" | "sgn" | "sign" | "vol" | "Vol" | "im" => {
                let Some(next) = walk.factors.get(walk.at) else { return };
                walk.at += 1;
                let mut inner = Walk { factors: std::slice::from_ref(next), at: 1, ..Walk::of(flip) };
                self.factor(&mut inner, next);
                let switch = self.switch(Switch::new(false, 0));
                walk.nodes.push(Node::Switch(switch, Box::new(Node::Product(inner.nodes))));
            }
            // The argument of `\exp(..)` is a scope of its own, and `\cos\theta_{ij}` is taken component by component.
            _ => {
                let argument = |next: &&Factor| matches!(next.atom, Atom::Group(_) | Atom::Kernel(_));
                let Some(next) = walk.factors.get(walk.at).filter(argument) else { return };
                walk.at += 1;
                let mut inner = Walk { factors: std::slice::from_ref(next), at: 1, ..Walk::of(flip) };
                self.factor(&mut inner, next);
                walk.any |= inner.any;
                let scope = Node::Scope(Box::new(Node::Product(inner.nodes)));
                if matches!(next.atom, Atom::Group(_)) {
                    return walk.nodes.push(scope);
                }
                let switch = self.switch(Switch { on: true, price: FUNCTION_PRICE, lends: true });
                walk.nodes.push(Node::Argument(switch, Box::new(scope)));
            }
        }
    }

    /// A sum sign binds the letters of its bounds: those before a relation surely, those after one perhaps.
    fn bind(&mut self, walk: &mut Walk<'_>, factor: &Factor) {
        let mut bound: Vec<Bound> = Vec::new();
        for script in factor.scripts.iter().filter(|script| script.level == Level::Down) {
            // A limit may bind the letter of its variable or leave it free.
            let limit = matches!(factor.atom, Atom::Big(Big::Limit, _));
            let mut doubtful = limit.then(|| self.switch(Switch::new(true, 0)));
            for item in &script.items {
                match &item.kind {
                    ItemKind::Relation(_) => doubtful = Some(self.switch(Switch::new(true, 0))),
                    ItemKind::Letter(letter) | ItemKind::Styled(letter) => {
                        bound.push(Bound { letter: letter.clone(), switch: doubtful, span: item.span });
                    }
                    ItemKind::Factor(inner) => {
                        let own = letters_of(inner).into_iter();
                        bound.extend(own.map(|(letter, span)| Bound { letter, switch: doubtful, span }));
                    }
                    _ => {}
                }
            }
        }
        if !bound.is_empty() {
            walk.nodes.push(Node::Bind(bound));
        }
        if self.sketch.reach.is_none() {
            self.sketch.reach = Some(self.switch(Switch::new(false, 0)));
        }
    }
}

/// The factors of one term on their way into nodes.
struct Walk<'t> {
    factors: &'t [Factor],
    /// The next factor.
    at: usize,
    flip: bool,
    /// How many factors more stand below a slash.
    below: usize,
    nodes: Vec<Node>,
    any: bool,
    /// The term matches anything while this switch is on.
    loose: Option<u32>,
    vector: bool,
    opaque: bool,
}

impl<'t> Walk<'t> {
    fn of(flip: bool) -> Self {
        Walk {
            factors: &[],
            at: 0,
            flip,
            below: 0,
            nodes: Vec::new(),
            any: false,
            loose: None,
            vector: false,
            opaque: false,
        }
    }

    /// `O(..)`, `\mathcal O(..)`.
    fn order_of(&self, kernel: &Kernel, factor: &Factor) -> bool {
        let next = self.factors.get(self.at).map(|next| &next.atom);
        matches!(kernel.letter.as_str(), "O" | "o")
            && factor.scripts.is_empty()
            && matches!(next, Some(Atom::Group(Group { bracket: Bracket::Round | Bracket::Square, .. })))
    }
}

impl Carrier<'_> {
    pub(super) const BRACKET: Carrier<'static> = Carrier { name: "", letter: "", bold: false, group: true };
}
