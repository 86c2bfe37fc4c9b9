//! What the commands of LaTeX and its usual packages mean to the reader.
//!
//! Package macros are understood by meaning, not expanded. The author's own definitions come first: this table
//! is asked only for names that the document does not define. Names stand without their backslash.

use std::sync::LazyLock;

use rustc_hash::FxHashMap;

/// The meaning of a command.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Class {
    /// A letter: Greek, or a sign that is written like one.
    Letter,
    /// Decorates its argument: `\hat`, `\bar`, `\dot`.
    Accent,
    /// Sets its argument in another type; letters only.
    Font,
    /// As a font, and a vector by it.
    Bold,
    /// Sets its argument in roman type: a word or a label.
    Roman,
    /// Switches the rest of its group to roman type (`\rm`).
    RomanSwitch,
    /// Switches the rest of its group to another type; passed over.
    Switch,
    /// Words.
    Text,
    /// `\frac` and kin: two arguments.
    Fraction,
    /// `a \over b`.
    Over,
    /// `\dv`, `\pdv`, `\fdv` and kin.
    Derivative,
    /// `\dd`, `\dif`: a differential.
    Differential,
    /// `\sqrt`.
    Root,
    /// `\sum` and kin.
    Sum,
    /// `\int` and kin.
    Integral,
    /// `\lim` and kin.
    Limit,
    /// A named function.
    Function,
    /// `\operatorname{..}`.
    Operator,
    /// `=`, `\equiv` and kin.
    Equal,
    /// Other relations that compare if both sides have indices.
    Loose,
    /// Arrows that map, membership: nothing is compared.
    Arrow,
    /// `\Rightarrow`, `\iff`, `\quad`: what follows is another statement.
    Separator,
    /// `\pm`, `\mp`.
    Plus,
    /// Signs of a product.
    Times,
    /// Spacing and layout without an argument.
    Space,
    /// A blank inside a script sets what follows apart.
    Stagger,
    /// Layout with one argument that prints nothing.
    Drop,
    /// Layout with two arguments that print nothing.
    Drop2,
    /// Prints nothing but takes room: `\phantom{..}`; sets what follows apart.
    Phantom,
    /// An arrow or a relation with words above it: `\xrightarrow[..]{..}`.
    ArrowWords,
    /// `\label`.
    Label,
    /// `\left`, `\big`: the next sign is a bracket.
    Delimiter,
    /// An opening bracket.
    Open,
    /// A closing bracket.
    Close,
    /// `\|`, `\vert`.
    Bar,
    /// An ellipsis.
    Dots,
    /// Passes its argument through: a box, a strike.
    Wrap,
    /// Passes its second argument through: `\textcolor{c}{..}`.
    Wrap2,
    /// `\cancelto{0}{..}`: struck out; the first argument says what it becomes.
    Struck,
    /// `\underbrace{..}_{..}`: the script is a label.
    Brace,
    /// `\overset{label}{body}`.
    Overset,
    /// Brackets by command: `\abs`, `\norm`.
    Norm,
    /// An average by command.
    Average,
    /// `\comm{a}{b}`.
    Pair,
    /// `\qty` of the `physics` package, or a quantity.
    Quantity,
    /// `\order`.
    Order,
    /// `\tensor{K}{..}`.
    Tensor,
    /// `\indices{..}`.
    Indices,
    /// A quantity with a unit: two arguments; a number.
    Number2,
    /// A number or a unit: one argument; a number.
    Number1,
    /// A sign that stands above: `\dagger`, `\prime`.
    Mark,
    /// `\begin`.
    Begin,
    /// `\end`.
    End,
    /// `\slashed{..}`: the argument is contracted with gamma matrices, no index.
    Slashed,
    /// `\bra`, `\ket`, `\braket`, `\mel`: arguments in angle brackets.
    Ket,
    /// `\eval{..}`: the argument, evaluated.
    Eval,
    /// `\not`: negates the next sign.
    Not,
    /// A matrix by command (`\mqty`, `\substack`): passed over with its argument.
    Block,
}

/// Functions that are known where they are typed without a backslash, letters side by side.
pub(crate) const TYPED_FUNCTIONS: &[&str] =
    &["det", "diag", "sin", "cos", "tan", "exp", "log", "const", "sgn", "max", "min"];

/// The meaning of a command's name, without its backslash.
pub(crate) fn class(name: &str) -> Option<Class> {
    TABLE.get(name).map(|(class, _)| *class)
}

/// A known command as LaTeX spells it, with its backslash, from its name without.
pub(crate) fn command(name: &str) -> Option<&'static str> {
    TABLE.get(name).map(|(_, command)| command.as_str())
}

static TABLE: LazyLock<FxHashMap<&'static str, (Class, String)>> = LazyLock::new(|| {
    let row = |(class, names): &(Class, &'static str)| {
        let class = *class;
        names.split(' ').map(move |name| (name, (class, format!("\\{name}"))))
    };
    WORDS.iter().flat_map(row).collect()
});

/// The LaTeX name of a letter or sign that may be typed as itself: `μ` is `\mu`.
pub(crate) fn latex_name(sign: &str) -> Option<&'static str> {
    static TABLE: LazyLock<FxHashMap<&'static str, &'static str>> = LazyLock::new(|| SIGNS.iter().copied().collect());
    TABLE.get(sign).copied()
}

/// The Unicode sign of a LaTeX letter: `\mu` is `μ`.
pub(crate) fn sign(name: &str) -> Option<&'static str> {
    static TABLE: LazyLock<FxHashMap<&'static str, &'static str>> =
        LazyLock::new(|| SIGNS.iter().rev().map(|(sign, name)| (*name, *sign)).collect());
    TABLE.get(name).copied()
}

/// A Greek name typed as a word in a note, as LaTeX.
pub(crate) fn greek_word(word: &str) -> Option<&'static str> {
    static TABLE: LazyLock<FxHashMap<&'static str, &'static str>> =
        LazyLock::new(|| SIGNS.iter().map(|(_, name)| (name.trim_start_matches('\\'), *name)).collect());
    TABLE.get(word).copied()
}

const SIGNS: &[(&str, &str)] = &[
    ("α", "\\alpha"),
    ("β", "\\beta"),
    ("γ", "\\gamma"),
    ("δ", "\\delta"),
    ("ε", "\\varepsilon"),
    ("ϵ", "\\epsilon"),
    ("ζ", "\\zeta"),
    ("η", "\\eta"),
    ("θ", "\\theta"),
    ("ϑ", "\\vartheta"),
    ("ι", "\\iota"),
    ("κ", "\\kappa"),
    ("λ", "\\lambda"),
    ("μ", "\\mu"),
    ("µ", "\\mu"),
    ("ν", "\\nu"),
    ("ξ", "\\xi"),
    ("π", "\\pi"),
    ("ρ", "\\rho"),
    ("ϱ", "\\varrho"),
    ("σ", "\\sigma"),
    ("ς", "\\varsigma"),
    ("τ", "\\tau"),
    ("υ", "\\upsilon"),
    ("φ", "\\varphi"),
    ("ϕ", "\\phi"),
    ("χ", "\\chi"),
    ("ψ", "\\psi"),
    ("ω", "\\omega"),
    ("Γ", "\\Gamma"),
    ("Δ", "\\Delta"),
    ("Θ", "\\Theta"),
    ("Λ", "\\Lambda"),
    ("Ξ", "\\Xi"),
    ("Π", "\\Pi"),
    ("Σ", "\\Sigma"),
    ("Υ", "\\Upsilon"),
    ("Φ", "\\Phi"),
    ("Ψ", "\\Psi"),
    ("Ω", "\\Omega"),
    ("∂", "\\partial"),
    ("∇", "\\nabla"),
    ("□", "\\Box"),
    ("ℏ", "\\hbar"),
    ("ℓ", "\\ell"),
];

const WORDS: &[(Class, &str)] = &[
    (
        Class::Letter,
        "alpha beta gamma delta epsilon varepsilon zeta eta theta vartheta iota kappa lambda mu nu xi pi varpi rho \
         varrho sigma varsigma tau upsilon phi varphi chi psi omega Gamma Delta Theta Lambda Xi Pi Sigma Upsilon Phi \
         Psi Omega varGamma varDelta varTheta varLambda varXi varPi varSigma varPhi varPsi varOmega digamma \
         partial nabla Box square dAlembert hbar hslash ell imath jmath wp aleph infty emptyset varnothing \
         laplacian dalembertian forall exists neg triangle bigtriangleup blacksquare i",
    ),
    (
        Class::Accent,
        "hat widehat bar overline tilde widetilde check widecheck vec overrightarrow overleftarrow \
         overleftrightarrow dot ddot dddot ddddot breve acute grave mathring underline underbar utilde mathaccent \
         overdot wideparen",
    ),
    (Class::Font, "mathcal mathscr mathfrak mathbb mathit mathnormal cal mathds mathsf mathtt mathsfit"),
    (
        Class::Bold,
        "mathbf boldsymbol bm pmb vb va vu vectorbold vectorarrow vectorunit bold symbf symbfit mathbfit mathbfsf",
    ),
    (Class::Roman, "mathrm mathup symup textsubscript"),
    (Class::RomanSwitch, "rm sf tt sc normalfont rmfamily sffamily"),
    (Class::Switch, "bf it em mit bfseries itshape boldmath unboldmath sl"),
    (
        Class::Text,
        "text textrm textit textbf textsf texttt textnormal textup textsc textsl mbox hbox intertext shortintertext \
         emph qq mathchoice fbox makebox framebox parbox textmd marginnote",
    ),
    (Class::Fraction, "frac dfrac tfrac cfrac nicefrac sfrac flatfrac ffrac xfrac binom dbinom tbinom"),
    (Class::Over, "over atop choose"),
    (Class::Derivative, "dv pdv fdv odv mdv derivative partialderivative functionalderivative diffp diff difs jdv"),
    (Class::Differential, "dd dif differential odif var variation pdif fdif Dif"),
    (Class::Root, "sqrt"),
    (Class::Sum, "sum prod coprod bigcup bigcap bigsqcup bigvee bigwedge bigodot bigoplus bigotimes biguplus sumint"),
    (Class::Integral, "int iint iiint iiiint oint oiint idotsint intop ointop smallint fint"),
    (Class::Limit, "lim max min sup inf limsup liminf varlimsup varliminf injlim projlim argmax argmin"),
    (
        Class::Function,
        "sin cos tan cot sec csc sinh cosh tanh coth sech csch arcsin arccos arctan arccot asin acos atan log ln lg \
         exp det tr Tr trace Trace rank rk dim ker hom deg arg gcd Pr diag erf erfc sgn sign grad div curl rot \
         gradient divergence Res pv PV principalvalue real imaginary asinh acosh atanh arsinh arcosh artanh \
         determinant Det Dim Ker Hom ad Ad Span span im supp vol Vol sym skew dev cof adj Re Im",
    ),
    (Class::Operator, "operatorname operatornamewithlimits mathop operator"),
    (
        Class::Equal,
        "equiv coloneqq coloneq eqqcolon eqcolon triangleq doteq doteqdot defeq eqdef colonequals Coloneqq hateq measeq questeq circeq",
    ),
    (
        Class::Loose,
        "approx simeq sim cong propto neq ne lt gt le leq ge geq leqslant geqslant ll gg lll ggg lesssim gtrsim \
         lessapprox gtrapprox asymp prec succ preceq succeq thickapprox thicksim backsim approxeq nleq ngeq lneq \
         gneq nsim ncong leqq geqq perp parallel nparallel mid nmid models vdash dashv lessgtr gtrless varpropto eqsim",
    ),
    (
        Class::Arrow,
        "to gets mapsto longmapsto rightarrow leftarrow longrightarrow longleftarrow leftrightarrow \
         longleftrightarrow hookrightarrow hookleftarrow twoheadrightarrow rightharpoonup rightharpoondown leadsto \
         rightsquigarrow nearrow searrow uparrow downarrow updownarrow in ni notin subset subseteq \
         supset supseteq subsetneq owns sqsubset rightleftharpoons rightrightarrows colon",
    ),
    (
        Class::Separator,
        "quad qquad Rightarrow Leftarrow Leftrightarrow Longrightarrow Longleftarrow Longleftrightarrow implies iff \
         impliedby therefore because land lor hfill hfil qc qand qor qif qthen qelse qgiven qfor qall \
         qcomma iffs",
    ),
    (Class::Plus, "pm mp"),
    (
        Class::Times,
        "cdot times otimes wedge ast circ bullet odot star oplus ominus oslash cross dotproduct crossproduct \
         vdot cdotp rtimes ltimes boxtimes cup cap setminus diamond amalg uplus sqcap sqcup vee lhd rhd owedge \
         barwedge curlywedge bigcirc intercal",
    ),
    (
        Class::Space,
        "displaystyle textstyle scriptstyle scriptscriptstyle limits nolimits nonumber notag noindent allowbreak \
         nobreak relax strut mathstrut hline par protect newline linebreak nolinebreak break ignorespaces \
         unskip displaybreak allowdisplaybreaks centering small footnotesize normalsize large Large scriptsize tiny \
         qed qedhere null leavevmode mathopen mathclose mathord mathpunct mathrel mathbin mathinner ensuremath \
         nobreakdash toprule midrule bottomrule llap rlap mathllap \
         mathrlap clap mathclap",
    ),
    (Class::Stagger, "enspace thinspace negthinspace medspace thickspace negmedspace negthickspace space nbsp enskip"),
    (
        Class::Drop,
        "tag ref eqref cref Cref autoref pageref cite citep citet citealt footnote footnotemark hspace vspace \
         mspace index marginpar todo thanks nocite vadjust color \
         footnotetext pagebreak \
         vref labelcref namecref",
    ),
    (Class::Drop2, "setcounter addtocounter setlength rule fontsize hypertarget"),
    (Class::Phantom, "phantom hphantom vphantom"),
    (
        Class::ArrowWords,
        "xrightarrow xleftarrow xleftrightarrow xRightarrow xLeftarrow xLeftrightarrow xmapsto xlongequal",
    ),
    (Class::Label, "label"),
    (
        Class::Delimiter,
        "left right middle big Big bigg Bigg bigl Bigl biggl Biggl bigr Bigr biggr Biggr bigm Bigm biggm Biggm",
    ),
    (Class::Open, "lbrace lbrack langle lfloor lceil lgroup lvert lVert lang llbracket lparen ulcorner"),
    (Class::Close, "rbrace rbrack rangle rfloor rceil rgroup rvert rVert rang rrbracket rparen urcorner"),
    (Class::Bar, "vert Vert arrowvert"),
    (Class::Dots, "dots ldots cdots vdots ddots dotsc dotsb dotsm dotsi dotso iddots mathellipsis hdots textellipsis"),
    (
        Class::Wrap,
        "boxed cancel bcancel xcancel sout uline uwave smash mathmakebox underparen \
         overparen hl highlight ovalbox shadowbox doublebox vcenter uuline \
         mathstrike tcboxmath tcbhighmath Aboxed ovalnode",
    ),
    (Class::Struck, "cancelto"),
    (Class::Wrap2, "textcolor colorbox mathcolor scalebox raisebox"),
    (Class::Brace, "underbrace overbrace underbracket overbracket"),
    (Class::Overset, "overset underset stackrel"),
    (Class::Norm, "abs norm absolutevalue ceil floor"),
    (Class::Average, "expval ev expectationvalue mean avg average vev"),
    (Class::Pair, "comm commutator acomm anticommutator pb poissonbracket anticomm"),
    (Class::Quantity, "qty quantity pqty bqty Bqty vqty"),
    (Class::Order, "order BigO bigO"),
    (Class::Tensor, "tensor"),
    (Class::Indices, "indices"),
    (Class::Number2, "SI numrange SIrange qtyrange"),
    (Class::Number1, "num si unit ang"),
    (Class::Mark, "dagger ddagger prime dag top bot degree"),
    (Class::Begin, "begin"),
    (Class::End, "end"),
    (Class::Slashed, "slashed cancelslash"),
    (
        Class::Ket,
        "bra ket braket mel ip innerproduct op outerproduct ketbra matrixel matrixelement dyad Bra Ket Braket",
    ),
    (Class::Eval, "eval evaluated"),
    (Class::Not, "not"),
    (
        Class::Block,
        "mqty pmqty bmqty vmqty matrixquantity substack smqty sPmqty dmat admat ytableaushort young imat xmat zmat",
    ),
];

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_author_reads_greek_both_ways() {
        assert_eq!(latex_name("μ"), Some("\\mu"));
        assert_eq!(sign("\\mu"), Some("μ"));
        assert_eq!(greek_word("Gamma"), Some("\\Gamma"));
        assert_eq!(class("mu"), Some(Class::Letter));
        assert_eq!(class("indexwise"), None);
    }
}
