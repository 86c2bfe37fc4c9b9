//! A sentence of a directive or of the conventions fits no form, or names what is not there.

use indexwise_grammar::conventions::{FORMS, Form, Unreadable};
use indexwise_grammar::hosts::Host;

use crate::conventions::clashes::Unknown;
use crate::finding::{Finding, Related, Severity};

use super::{Check, Rule};

pub(super) const RULE: Rule = Rule {
    name: "convention-unreadable",
    severity: Severity::Error,
    summary: "A sentence of a directive or of the conventions fits no known form.",
    page: include_str!("convention_unreadable.md"),
    on: true,
    check: Check::Document,
};

/// The finding for a sentence: it stands at the word where reading stopped. The example is spelt as in the host.
pub(crate) fn convention_unreadable(sentence: &Unreadable, host: Host) -> Finding {
    let example = |form: &Form| match form.example_note {
        Some(example) if host == Host::Note => example,
        _ => form.example,
    };
    let nearest = match sentence.nearest {
        Some(form) => format!("the nearest form is \"{}\", as in \"{}\"", form.form, example(form)),
        None => format!("\"indexwise explain {}\" lists the {} forms", RULE.name, FORMS.len()),
    };
    let message = format!("this sentence has no known form: {}; {nearest}", sentence.reason);
    let related = vec![Related { span: sentence.span, message: "the sentence".to_owned() }];
    Finding { related, ..Finding::plain(RULE.name, RULE.severity, sentence.at, message) }
}

/// The finding for a name in a sentence that means nothing there.
pub(crate) fn unknown_name(name: &Unknown) -> Finding {
    Finding::plain(RULE.name, RULE.severity, name.span, name.message.clone())
}
