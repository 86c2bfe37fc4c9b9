//! What formulas read as, in the words of the tree's dump.
#![allow(clippy::unwrap_used, clippy::indexing_slicing)]

use super::*;
use crate::tree::dump;

fn read(body: &str) -> Formula {
    let draft = prepare(body, 0, &Macros::default());
    parse_all(&[(Span::new(0, body.len()), true, draft)]).pop().unwrap()
}

fn note(body: &str) -> String {
    let draft = prepare_note(body, 0);
    dump(&parse_all(&[(Span::new(0, body.len()), true, draft)]).pop().unwrap())
}

#[track_caller]
fn reads(body: &str, expected: &str) {
    let formula = read(body);
    assert_eq!(dump(&formula), expected, "{body}");
    assert!(formula.unread.is_empty(), "{body}: {:?}", formula.unread);
}

#[test]
fn scripts_in_every_habit() {
    reads(r"R^\rho_{\sigma\mu\nu}", r"R^{\rho}_{\sigma \mu \nu}");
    reads(r"R^\rho{}_{\sigma\mu}", r"R^{\rho}_{\sigma \mu}");
    reads(r"R^{\rho}_{\ \sigma\mu}", r"R^{\rho}_{\sigma \mu}");
    reads(r"R^\rho_{\phantom{\rho}\sigma}", r"R^{\rho}_{\sigma}");
    reads(r"{R^\rho}_{\sigma}", r"R^{\rho}_{\sigma}");
    reads(r"{}^{(3)}R_{ij}", r"⟨⟩^{( 3 )} R_{i j}");
    reads(r"^4G_{ab}", r"G^{4}_{a b}");
    reads(r"g_{ \mu  \nu }", r"g_{\mu \nu}");
    reads(r"\tensor{R}{^\rho_\sigma_\mu_\nu}", r"R^{\rho}_{\sigma}_{\mu}_{\nu}");
    reads(r"\tensor{h}{_{jk}^{,i}}", r"h_{j k}^{, i}");
    reads(r"T\indices{^a_b}", r"T^{a}_{b}");
    reads(r"u_\hat{a}^b", r"u_{\hat a}^{b}");
}

#[test]
fn primes_accents_and_numbers() {
    reads(r"\Lambda^{\mu'}{}_\nu", r"\Lambda^{\mu'}_{\nu}");
    reads(r"x'^\mu", r"x'^{\mu}");
    reads(r"x^{\prime\mu}", r"x^{prime \mu}");
    reads(r"\hat e_{(a)}", r"\hat e_{( a )}");
    reads(r"\bar\psi_{\dot\alpha}", r"\bar \psi_{\dot \alpha}");
    reads(r"T^{\mu_1\mu_2}", r"T^{\mu_1 \mu_2}");
    reads(r"\mathcal L_\xi", r"\mathcal L_{\xi}");
    reads(r"\rho_{\rm m} k_\text{eff} h^{\mathrm{TT}}_{ij}", r"\rho_{“m”} k_{“eff”} h^{“TT”}_{i j}");
}

#[test]
fn derivatives_and_fractions() {
    reads(r"\frac12 \frac{\partial f}{\partial x^\mu}", r"[1 / 2] [\partial f / \partial x^{\mu}]");
    reads(r"\pdv{f}{x^\mu}", r"[\pdv f / x^{\mu}]");
    reads(r"\pdv{f}{x}{y}", r"[\pdv f / ⟨x⟩ ⟨y⟩]");
    reads(r"\dv[2]{x^i}{t}", r"[\dv^{2} x^{i} / t]");
    reads(r"A_{\mu,\nu} \phi_{;i}", r"A_{\mu , \nu} \phi_{; i}");
    reads(r"{a \over b}", r"[a / b]");
    reads(r"\dd{x^\mu} \dd x", r"⟨x^{\mu}⟩\dd  d x");
}

#[test]
fn brackets_and_bars() {
    reads(r"T_{(ij)} T_{[i|j|k]}", r"T_{( i j )} T_{[ i | j | k ]}");
    reads(r"\nabla_{[a} R_{bc]de}", r"\nabla_{[ a} R_{b c ] d e}");
    reads(r"\left( a + b \right) |c|^2", r"Round(a + b) Bars(c)^{2}");
    reads(r"[0, 1)", r"Square(0, 1)");
    reads(r"\left. f \right|_{x=0}", r"f Bars()_{x = 0}");
    reads(r"\qty(a_i + b_i) c", r"Round(a_{i} + b_{i}) c");
}

#[test]
fn statements_and_rows() {
    reads(r"A &= B \\ &= C", "A Equal B Equal C");
    reads(r"A &= B \\ &\quad + C", "A Equal B + C");
    reads(r"A &= B \\ C &= D", "A Equal B\nC Equal D");
    reads(r"A &= B & C &= D", "A Equal B\nC Equal D");
    reads(r"A & = & B", "A Equal B");
    reads(r"A = B, \quad i = 1", "A Equal B\ni Equal 1");
    reads(r"A = B \quad \text{for all } i", "A Equal B\ni");
    reads(r"A \to B", r"A Free(\to) B");
    reads(r"\boxed{A = B}", "A Equal B");
    reads(r"A := -B", "A Equal(:=) -B");
    reads(r"\begin{aligned} A &= B \\ &+ C \end{aligned}", "A Equal B + C");
    reads(r"f = \begin{cases} a & x > 0 \\ b \end{cases}", "f Equal matrix");
    reads(r"a \left( b \right. \\ \left. + c \right)", "a Round(b + c)");
}

#[test]
fn words_and_functions() {
    reads(r"\det g_{ij} \operatorname{tr}(K) \mathrm{d}x", r"fn:det g_{i j} fn:tr Round(K) d x");
    reads(r"\mathop{\mathrm{tr}} K", r"fn:tr K");
    reads(r"det \begin{bmatrix} a \end{bmatrix}", "fn:det matrix");
    reads(r"\text{Area} = 2", "“Area” Equal 2");
    reads(r"a \SI{3}{\metre}", r"a \SI");
    reads(r"\underbrace{a + b}_{= 0} c", "⟨a + b⟩_{= 0} c");
}

#[test]
fn nothing_stops_the_reader() {
    reads(r"a ) b", "a b");
    reads(r"\foo{x_i} y", "?foo(x_{i}) y");
    reads(r"x^", "x^{}");
    assert_eq!(read(r"\hat").unread.len(), 1);
    let deep = format!("{}x{}", "{".repeat(500), "}".repeat(500));
    assert_eq!(read(&deep).unread.len(), 1);
    let prefixes = "\\hat".repeat(500);
    assert_eq!(read(&prefixes).unread.len(), 1);
}

#[test]
fn signs_keep_what_they_are() {
    reads(r"- - a \pm b \mp - c", r"+a \pm b \pm c");
    reads(r"a \cdot b \times c \wedge d \otimes e * f : g", r"a \cdot b \times c \wedge d \otimes e * f : g");
    reads(r"a \cdot - b", r"a \cdot ∅ - b");
    reads(r"a{/}b \big/ c f \circ g", r"a / b / c f \circ g");
    reads(r"x^{-1} x^{1/2} x^{n+1} x^{2 \times n}", r"x^{- 1} x^{1 / 2} x^{n + 1} x^{2 \times n}");
    reads(r"x^{1 \over 2} A^{T} \sum_{i \leq n}", r"x^{1 \over 2} A^{T} Sum_{i \leq n}");
    reads(r"\sqrt[3]{x} \prod_i \binom{n}{k} {a \atop b}", r"√[3](x) Sum(\prod)_{i} [\binom n / k] [\atop a / b]");
    reads(r"n! + (a b)' + \overline{a + b}", r"n! + Round(a b)' + ⟨a + b⟩\overline ");
    reads(r"\|a\| \lfloor b \rfloor \acomm{a}{b}", r"Bars‹\|›(a) Round‹\lfloor›(b) Pair‹\acomm›(a, b)");
    reads(r"\order{h^2} \sqrt{a, b}", r"O(h^{2}) √(⟨a⟩ , ⟨b⟩)");
    reads("½ a − b ≤ c", r"[1 / 2] a - b Order(\leq) c");
    reads(r"T_{0'}", r"T_{0'}");
}

#[test]
fn signs_in_braces_are_signs() {
    reads(r"A_{i} {=} B{/}c \overset{(3)}{\approx} D", r"A_{i} Equal B / c Loose(\approx) D");
    reads(r"A_{ij} \overset{(3)}{=} B_{ij}", r"A_{i j} Equal B_{i j}");
    reads(r"x^{/} y^{*}", r"x^{/} y^{*}");
}

#[test]
fn a_definition_is_told_from_a_claim() {
    use crate::tree::Claim::{Definition, DefinitionOfRight, Equality, Other};
    let claim = |sign: &str| read(&format!("a {sign} b")).statements[0].relations[0].claim();
    for (sign, expected) in [
        ("=", Equality),
        (r"\equiv", Equality),
        ("≡", Equality),
        (r"\overset{(3)}{=}", Equality),
        (":=", Definition),
        (r"\coloneqq", Definition),
        (r"\stackrel{\text{def}}{=}", Definition),
        (r"\overset{\Delta}=", Definition),
        ("=:", DefinitionOfRight),
        (r"\doteq", Other),
        (r"\stackrel{!}{=}", Other),
        (r"\not=", Other),
        (r"\approx", Other),
    ] {
        assert_eq!(claim(sign), expected, "{sign}");
    }
}

#[test]
fn what_is_passed_over_shows() {
    for body in [r"a ) b", r"\left( a", r"\overset{(3)}{g}_{ij}", "a ☼ b", r"{\rm tr} K"] {
        assert!(read(body).passed_over, "{body}");
    }
    for body in [r"(a) \rho_{\rm m} \nabla_{[a} R_{bc]}", r"a \overset{!}{=} b", r"\tag{3} a, b.", "½ a"] {
        assert!(!read(body).passed_over, "{body}");
    }
}

#[test]
fn notes_read_as_typed() {
    assert_eq!(note("Gamma^i_jk = 1/2 g^ij ∂_k g_ij"), r"\Gamma^{i}_{j k} Equal 1 / 2 g^{i j} \partial_{k} g_{i j}");
    assert_eq!(note("(trace) sigma_ij,k = mass u_i [det]"), r"\sigma_{i j , k} Equal “mass” u_{i}");
    assert_eq!(note("R^{mu}_{nu rho} + T_(ij) - F_mu"), r"R^{\mu}_{\nu \rho} + T_{( i j )} - F_{\mu}");
    assert_eq!(note("a\n  = b\n  + c"), "a Equal b + c");
    assert_eq!(note("log sqrt g"), "fn:log √(g)");
    assert_eq!(note("a != b <= c ~ d"), r"a Order(\neq) b Order(\leq) c Loose(\sim) d");
    assert_eq!(note("½ ∂f + ∇_kφ"), r"[1 / 2] \partial f + \nabla_{k \varphi}");
    assert_eq!(note(r"\mathrm{const} + \operatorname{sinc} x"), r"“const” + fn:sinc x");
}
