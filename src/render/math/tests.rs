use super::*;

fn symbol(name: &str) -> Box<Math> {
    Box::new(Math::Symbol(name.into()))
}

#[test]
fn hand_subscript_words_are_upright_and_single_letters_are_not() {
    let word = Math::Subscript(symbol("T"), symbol("in"));
    let letter = Math::Subscript(symbol("C"), symbol("d"));
    assert_eq!(to_latex(&word), "T_{\\mathrm{in}}");
    assert_eq!(to_latex(&letter), "C_{d}");
    assert_eq!(
        to_mathml(&word),
        "<math><msub><mi>T</mi><mi mathvariant=\"normal\">in</mi></msub></math>"
    );
    assert_eq!(
        to_mathml(&letter),
        "<math><msub><mi>C</mi><mi>d</mi></msub></math>"
    );
}

#[test]
fn hand_cases_roots_and_signs() {
    let root = Math::Root {
        radicand: Box::new(Math::Row(vec![
            Math::Number("2".into()),
            *symbol("g"),
            *symbol("h"),
        ])),
        degree: None,
    };
    let cases = Math::Cases(vec![
        (
            root,
            Math::Row(vec![
                *symbol("h"),
                Math::Operator(">".into()),
                Math::Number("0".into()),
            ]),
        ),
        (Math::Number("0".into()), Math::Upright("otherwise".into())),
    ]);
    assert_eq!(
        to_latex(&cases),
        "\\begin{cases} \\sqrt{2 g h} & h \\gt 0 \\\\ 0 & \\mathrm{otherwise} \\end{cases}"
    );
    assert_eq!(to_plain(&cases), "√(2gh) if h > 0; 0 otherwise");
    let negative = Math::Row(vec![
        *symbol("x"),
        Math::Operator("=".into()),
        Math::Operator("−".into()),
        *symbol("α"),
    ]);
    assert_eq!(to_latex(&negative), "x = - \\alpha");
    assert!(to_mathml(&negative).contains("form=\"prefix\">−"));
}

#[test]
fn hand_text_of_users_cannot_leave_the_formula() {
    let hostile = Math::Row(vec![
        Math::Upright("a|b$<c>&_".into()),
        Math::Symbol("</mi>".into()),
    ]);
    let latex = to_latex(&hostile);
    assert!(
        !latex.contains('|') && !latex.contains('<') && !latex.replace("\\$", "").contains('$'),
        "{latex}"
    );
    assert!(!to_mathml(&hostile).contains("</mi></mi>"));
}

#[test]
fn prop_the_function_table_is_sorted_for_binary_search() {
    assert!(FUNCTIONS.windows(2).all(|pair| pair[0] < pair[1]));
}
