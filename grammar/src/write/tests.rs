//! What formulas look like in each dialect. That they are read again as they were is tried on all documents, in the
//! tests of the whole.
#![allow(clippy::unwrap_used, clippy::indexing_slicing)]

use super::*;
use crate::tree::{Formula, ItemKind, Level, Sign, dump, substitute_letter, written_out};
use crate::{read_formula, read_note_formula};

fn one(body: &str) -> Formula {
    let formula = read_formula(body, &Default::default());
    assert_eq!(formula.statements.len(), 1, "{body}");
    formula
}

#[track_caller]
fn shows(body: &str, dialect: Dialect, expected: &str) {
    let written = write_statement(&one(body).statements[0], dialect);
    assert_eq!(written.text, expected, "{body}");
    assert!(written.complete, "{body}");
}

#[test]
fn a_terminal_shows_what_is_printed() {
    for (body, expected) in [
        (r"\Gamma^i_{ik} = \frac12 g^{ij} \partial_k g_{ij}", "Γ^i_{ik} = ½ g^{ij} ∂_k g_{ij}"),
        (r"R^\rho{}_{\sigma\mu\nu} = - \partial_\nu \Gamma^\rho_{\mu\sigma}", "R^ρ{}_{σμν} = -∂_ν Γ^ρ_{μσ}"),
        (r"\nabla^2 f \neq \partial f", "∇^2 f ≠ ∂f"),
        (r"\Lambda^{\mu'}{}_\nu x'^\nu", "Λ^{μ'}{}_ν x'^ν"),
        (r"\dot x^\mu \ddot{\theta} \bar\psi_{\dot\alpha}", "x\u{307}^μ θ\u{308} ψ\u{304}_{α\u{307}}"),
        (r"\mathbf{u} \cdot \boldsymbol\sigma \times \mathcal{L}_\xi", "𝐮 · 𝛔 × 𝓛_ξ"),
        (r"T_{(ij)} + S_{[i|j|k]}", "T_{(ij)} + S_{[i|j|k]}"),
        (r"\phi_{,i} - A_{\mu;\nu}", "ϕ_{,i} - A_{μ;ν}"),
        (r"\rho_{\rm m} h^{\mathrm{TT}}_{ij}", "ρ_{m} h^{TT}_{ij}"),
        (r"g_{00} + g_{0 0} + T^{0i}", "g_{00} + g_{0 0} + T^{0i}"),
        (r"M^{-1} + x^{n+1} + x^{1/2} + U^\dagger", "M^{-1} + x^{n+1} + x^{1/2} + U^†"),
        (r"e^{i k_\mu x^\mu}", "e^{i k_μ x^μ}"),
        (r"(\partial_\mu\phi)^2 + |a|^2 + \|b\|", "(∂_μ ϕ)^2 + |a|^2 + ‖b‖"),
        (r"{}^{(3)}R_{ij} + n!", "^{(3)}R_{ij} + n!"),
        (r"T^{\mu_1\mu_2} \pm a \mp b", "T^{μ_1μ_2} ± a ∓ b"),
        (r"A_i := B_i \approx 2 D_i", "A_i := B_i ≈ 2 D_i"),
        (r"\det g_{ij} \to \sin(k x)", "det g_{ij} → sin(k x)"),
        (r"f(x^\mu) + m (a + b)", "f(x^μ) + m (a + b)"),
        (r"\comm{A_i}{B_j} = \langle a \rangle", "[A_i, B_j] = ⟨a⟩"),
        (r"\sum_{i=1}^{3} a_i + \prod_k b_k", "∑_{i=1}^3 a_i + ∏_k b_k"),
        (r"\left. f \right|_{x=0}", "f |_{x=0}"),
        (r"\overline{a + b} \dd{x^\mu}", "overline(a + b) dx^μ"),
    ] {
        shows(body, Dialect::Unicode, expected);
    }
}

#[test]
fn fractions_stand_in_a_line() {
    for (body, expected) in [
        (r"\frac{a}{b}", "a/b"),
        (r"\frac{a}{b} c", "(a/b) c"),
        (r"c \frac{a}{b}", "c (a/b)"),
        (r"\frac{a + b}{c d}", "(a + b)/(c d)"),
        (r"\frac{-a}{-b}", "(-a)/(-b)"),
        (r"\frac{\frac{a}{b}}{c}", "(a/b)/c"),
        (r"\frac{a}{b}^2", "(a/b)^2"),
        (r"\frac{7}{9} c", "7/9 c"),
        (r"-\frac14 c", "-¼ c"),
        (r"a / b c", "a/b c"),
        (r"\frac{\partial f}{\partial x^\mu}", "∂f/∂x^μ"),
        (r"\frac{\partial^2 f}{\partial x^i \partial x^j}", "(∂^2 f)/(∂x^i ∂x^j)"),
        (r"\pdv{f}{x^\mu} + \dv{f}{t} + \fdv{S}{\phi}", "∂f/∂x^μ + df/dt + δS/δϕ"),
        (r"\dv[2]{x^i}{t} + \pdv{x}", "d^2 x^i/dt^2 + ∂/∂x"),
        (r"\pdv{f}{x}{y} + \pdv[2]{f}{x^\mu}", "∂^2 f/(∂x ∂y) + ∂^2 f/(∂x^μ)^2"),
        (r"\pdv{x}(a + b) + \pdv{(a + b)}{x}", "(∂/∂x) (a + b) + ∂(a + b)/∂x"),
        (r"\sqrt{g} + \sqrt{-g} + \sqrt[3]{x}", "√g + √(-g) + ∛x"),
        (r"\binom{n}{k}", "binom(n, k)"),
    ] {
        shows(body, Dialect::Unicode, expected);
    }
}

#[test]
fn a_note_is_written_as_typed() {
    for (body, expected) in [
        (r"\Gamma^i_{ik} = \frac12 g^{ij} \partial_k g_{ij}", "Gamma^i_ik = 1/2 g^ij partial_k g_ij"),
        (r"R^\mu{}_{\nu\rho} + F_{\mu} - T_{(ij)}", "R^mu{}_{nu rho} + F_mu - T_(ij)"),
        (r"u_{i,jk} + A_{\mu;\nu} + \phi_{,i}", "u_i,jk + A_mu;nu + phi_,i"),
        (r"g_{00} + g_{0 0} + T^{0i} + x^{12}", "g_00 + g_{0 0} + T^0i + x^12"),
        (r"p_{pi} + q_{\pi i} + q_\pi + x_{mu}", "p_{p i} + q_{pi i} + q_pi + x_{m u}"),
        (r"\mathrm{mass}\, u_i + \log \sqrt{g}", "mass u_i + log sqrt g"),
        (r"\hat{u}_i + x'^\nu + M^{-1}", r"\hat{u}_i + x'^nu + M^{-1}"),
        (r"\frac{\partial f}{\partial x^\mu} V^\mu", "(partial f/partial x^mu) V^mu"),
        (r"\frac{a + b}{c d}", "(a + b)/(c d)"),
        (r"\nabla_{[a} R_{bc]de} = 0", "nabla_{[a} R_{b c]d e} = 0"),
        (r"(ab) c = [A, B]", r"(a b) c = \left[A, B]"),
        (r"(x_i) c = [A, B] d", "( x_i) c = [A, B] d"),
        (r"\sum_i a_i \cdot b_i", "sum_i a_i · b_i"),
        (r"\mathrm{const}\, \operatorname{sinc} x", r"\mathrm{const} \operatorname{sinc} x"),
    ] {
        shows(body, Dialect::Note, expected);
    }
}

#[test]
fn latex_takes_no_more_braces_than_it_needs() {
    for body in [
        r"\Gamma^i_{ik} = \frac{1}{2} g^{ij} \partial_k g_{ij}",
        r"R^\rho{}_{\sigma\mu\nu} - \partial_{(i} A_{j)}",
        r"\hat{e}_{(a)} \bar{\psi}_{\dot{\alpha}} \tilde{g}'_{ab}",
        r"\sum_{i=1}^3 a_i + \left\|b\right\|^2 + \left( \frac{a}{b} \right)^2",
        r"\pdv[2]{f}{x^\mu} + \sqrt[3]{x} + \pdv{f}{x}{y}",
        r"-a \pm b \cdot c",
    ] {
        shows(body, Dialect::Latex, body);
    }
}

#[test]
fn unusual_formulas_are_read_as_they_were() {
    for body in [
        r"(n! + m'!)^2 + (a b)' + \overline{a + b}^2 + \overline{AB}",
        r"{^4G}_{ab} + {}^4 G - ^3R",
        r"a \cdot - b \circ c \wedge d : e",
        r"\dd{x^\mu} \dd[3]{x} \mathbf{A B} \mathbb{1} \bar{0}",
        r"{a \atop b} + \binom{n}{k} + \sqrt{a, b} + \order{h^2}",
        r"\comm{a}{b} \acomm{a}{b} \braket{a}{b} \ceil{x} \lfloor x \rfloor \left< a \right>",
        r"\pdv{f}{x} \boxed{a} (\boxed{-a}) \foo{a}{b} \cdot \boxed{a + b}",
        r"x_{i_1} x_{i'_1} x_{\mu'} x_{0'} x_{\mathbf{i}} x_{\hat a} x_{\mathrm{d}} x_{\rm d} x_{\bar{\mathrm{Re}}}",
        r"x^{1 \over 2} x^{n!} x^{\frac12} x^{(n+1)/2} x^{2 \times n} x_{i \neq j, k \in A} x_{m i n}",
        r"\underbrace{a + b}_{= c} + \cancel{a} + \underbrace{x}_{=0}",
        r"{\cal L} + \mathcal{L} + \slashed{p} + \vec{x}'' + \mathrm{H2} + \mathit{rot} + \mathrm{rot} A",
        r"a \xrightarrow{t} b \not= c \stackrel{!}{=} d \mapsto e \stackrel{\text{def}}{=} f",
        r"a = {-b} + {c {-d}} + (a \text{ if } b) + A^{\text{a b}}",
        r"x{}^a{}_b + \tensor{R}{^a_b} + {T^a}_b + \det{}^2 g",
        r"\left.\right| + a \big|_x^y + |a|b||c|| ",
        r"x_{\abs{m} < n} + e^{-\norm{x - y}/c} + y_{\expval{F_i}}",
        r"x^{\prime\mu} + x^{*} + x^{\dagger} + T_{<ij>} + T_{\langle ij \rangle}",
    ] {
        let formula = read_formula(body, &Default::default());
        for statement in formula.statements {
            let written = write_statement(&statement, Dialect::Latex);
            let before = dump(&Formula { statements: vec![statement], ..Formula::default() });
            assert_eq!(dump(&read_formula(&written.text, &Default::default())), before, "{body} as {}", written.text);
        }
    }
}

#[test]
fn unicode_is_read_in_notes_where_the_signs_are_known() {
    for body in [
        r"\Gamma^i_{ik} = \frac12 g^{ij} \partial_k g_{ij}",
        r"R^\rho{}_{\sigma\mu\nu} = \partial_\mu\Gamma^\rho_{\nu\sigma} - \partial_\nu \Gamma^\rho_{\mu\sigma}",
        r"\phi_{,i} - A_{\mu;\nu} + T_{(ij)} - S_{[i|j|k]} \pm a",
        r"g_{00} + M^{-1} + x^{n+1} + \nabla^2 f \neq \partial f",
        r"f(x^\mu) + |a|^2 + \sqrt{g} + \log g \leq a \cdot b \otimes c",
        r"\sum_{i=1}^{3} a_i + \det g_{ij} \to n!",
    ] {
        let formula = one(body);
        let written = write_statement(&formula.statements[0], Dialect::Unicode);
        assert_eq!(dump(&read_note_formula(&written.text)), dump(&formula), "{}", written.text);
    }
}

#[test]
fn what_cannot_be_said_is_shown() {
    for (body, shown) in [
        (r"g = \begin{pmatrix} a \end{pmatrix}", "g = [matrix]"),
        (r"a = \SI{3}{\metre}", "a = [quantity]"),
        (r"a \hat", "a [a command without its argument]"),
    ] {
        let formula = one(body);
        for dialect in [Dialect::Unicode, Dialect::Latex, Dialect::Note] {
            assert!(!write_statement(&formula.statements[0], dialect).complete, "{body}");
        }
        assert_eq!(write_statement(&formula.statements[0], Dialect::Unicode).text, shown);
    }
}

#[test]
fn parts_are_written_by_themselves() {
    let formula = one(r"A_i = - B_i + \frac{a}{b}");
    let side = &formula.statements[0].sides[1];
    assert_eq!(write_sum(side, Dialect::Unicode).text, "-B_i + a/b");
    assert_eq!(write_term(&side.terms[0], Dialect::Unicode).text, "-B_i");
    assert_eq!(write_term(&side.terms[1], Dialect::Unicode).text, "+a/b");
    let plus = side.terms[1].sign.unwrap();
    let unsigned = Term { sign: None, ..side.terms[1].clone() };
    assert_eq!(write_term(&unsigned, Dialect::Unicode).text, "a/b");
    assert_eq!(plus, Sign { kind: SignKind::Plus, span: plus.span });
    let factor = &formula.statements[0].sides[0].terms[0].factors[0];
    assert_eq!(write_factor(factor, Dialect::Latex).text, "A_i");
    assert_eq!(factor.scripts[0].level, Level::Down);
}

fn first_term(body: &str) -> Term {
    one(body).statements[0].sides[0].terms[0].clone()
}

fn number(value: &str) -> ItemKind {
    ItemKind::Number(value.into())
}

#[track_caller]
fn becomes(body: &str, from: &str, to: &ItemKind, expected: &str) {
    let mut term = first_term(body);
    let places = substitute_letter(&mut term, from, to);
    assert_eq!(write_term(&term, Dialect::Latex).text, expected, "{body}");
    // Each place is a letter gone: none is left to be replaced.
    assert_eq!((substitute_letter(&mut term, from, to), places > 0), (0, body != expected), "{body}");
}

#[test]
fn a_letter_is_replaced_wherever_it_stands() {
    let one = number("1");
    for (body, expected) in [
        (r"\Gamma^\mu_{\mu k}", r"\Gamma^1_{1k}"),
        (r"\frac{\partial f}{\partial x^\mu}", r"\frac{\partial f}{\partial x^1}"),
        (r"\pdv[2]{f_\mu}{x^\mu}{y}", r"\pdv[2]{f_1}{x^1}{y}"),
        (r"\frac{\frac{a^\mu}{b}}{c_\mu}", r"\frac{\frac{a^1}{b}}{c_1}"),
        (r"(a_\mu + [b^\mu, c])^2", r"(a_1 + [b^1, c])^2"),
        (r"f (x^\mu, y) \sin (k_\mu)", r"f (x^1, y) \sin (k_1)"),
        (r"e^{i k_\mu x^\mu}", r"e^{i k_1 x^1}"),
        (r"\sqrt[n_\mu]{g^{\mu\nu}} \overline{a_\mu b}", r"\sqrt[n_1]{g^{1\nu}} \overline{a_1 b}"),
        (r"\foo{x_\mu} \cancel{c_\mu} {a_\mu b}", r"\foo{x_1} \cancel{c_1} {a_1 b}"),
        (r"\sum_\mu T^{\mu'}_{\mu}", r"\sum_1 T^{\mu'}_1"),
        (r"T^{(\mu\nu)}{}_{,\mu}", r"T^{(1\nu)}{}_{,1}"),
        (r"\mu \nabla_\nu A", r"\mu \nabla_\nu A"),
    ] {
        becomes(body, r"\mu", &one, expected);
    }
    becomes(r"g^{ij} u_i", "i", &ItemKind::Letter(r"\theta".into()), r"g^{\theta j} u_\theta");
    becomes(r"g_{ij} v_{i'}", "i'", &ItemKind::Letter("k".into()), r"g_{ij} v_k");
}

#[test]
fn a_contraction_is_written_out() {
    let values: Vec<ItemKind> = ["1", "2", "3"].map(number).into();
    let out = |body: &str| write_sum(&written_out(&first_term(body), "i", &values), Dialect::Unicode).text;
    assert_eq!(out(r"\Gamma^i_{ik}"), "Γ^1_{1k} + Γ^2_{2k} + Γ^3_{3k}");
    assert_eq!(out(r"-\frac12 g^{ij} g_{ij}"), "-½ g^{1j} g_{1j} - ½ g^{2j} g_{2j} - ½ g^{3j} g_{3j}");
    assert_eq!(out(r"\frac{\partial v^i}{\partial x^i}"), "∂v^1/∂x^1 + ∂v^2/∂x^2 + ∂v^3/∂x^3");
    assert!(written_out(&first_term("a"), "i", &[]).terms.is_empty());
}

#[test]
fn pieces_make_formulas() {
    let letter = |letter: &str| ItemKind::Letter(letter.into());
    let slots =
        |letters: &[(Level, &str)]| letters.iter().map(|(level, name)| (*level, letter(name))).collect::<Vec<_>>();
    let riemann = slots(&[(Level::Up, "i"), (Level::Down, "j"), (Level::Down, "k"), (Level::Up, "l")]);
    let half = Factor::quotient(Sum::of_factor(Factor::number(1)), Sum::of_factor(Factor::number(2)));
    let product = Term::of(vec![half, Factor::kernel("R", &riemann), Factor::kernel(r"\phi", &[])]);
    let sum = Sum::of(vec![product.clone().signed(SignKind::Minus), product.signed(SignKind::Plus)]);
    let expected = r"-\frac{1}{2} R^i{}_{jk}{}^l \phi + \frac{1}{2} R^i{}_{jk}{}^l \phi";
    assert_eq!(write_sum(&sum, Dialect::Latex), Written { text: expected.to_owned(), complete: true });
    let again = sum.terms[0].clone().signed(SignKind::Minus);
    assert_eq!(again.sign.unwrap().kind, SignKind::Plus);
}
