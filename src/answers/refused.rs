//! Problems that answer a person's refused act: what stands against it, and what can be done.

use super::problem::{Problem, ProblemError, ProblemKind};
use crate::alarms::AlarmRefused;
use crate::orders::{Refusal, RefusalWhy};

impl Problem {
    /// A person's act on an alarm that is refused.
    pub fn alarm_refused(why: AlarmRefused) -> Self {
        let kind = match why {
            AlarmRefused::NeverShelved | AlarmRefused::NotFrom(_) => ProblemKind::Conflict,
            _ => ProblemKind::Invalid,
        };
        refused(kind, &why.to_string(), why.pointer())
    }

    /// A person's act on a work order that is refused.
    pub fn order_refused(refusal: &Refusal) -> Self {
        let kind = match refusal.why {
            RefusalWhy::NotFrom { .. }
            | RefusalWhy::AnotherOpen(_)
            | RefusalWhy::VerdictNotKnown => ProblemKind::Conflict,
            _ => ProblemKind::Invalid,
        };
        let step = refusal.pointer.strip_prefix("/steps/").and_then(|rest| {
            let index = rest.split('/').next()?.parse::<usize>().ok()?;
            Some(format!("in step {} of the plan, ", index + 1))
        });
        let said = refusal.to_string();
        // A conflict names its steps itself.
        let place = step.filter(|_| !matches!(refusal.why, RefusalWhy::Conflict(_)));
        refused(kind, &format!("{}{said}", place.unwrap_or_default()), &refusal.pointer)
    }
}

fn refused(kind: ProblemKind, said: &str, pointer: &str) -> Problem {
    let errors = match pointer {
        "" => Vec::new(),
        pointer => vec![ProblemError::at_pointer(pointer, said)],
    };
    kind.problem(sentence(said)).with_errors(errors)
}

/// With a capital and a stop, unless it begins with code.
fn sentence(said: &str) -> String {
    let mut letters = said.chars();
    let first = letters.next().map(|c| c.to_uppercase().to_string()).unwrap_or_default();
    format!("{first}{}.", letters.as_str())
}

#[cfg(test)]
mod tests {
    use serde_json::json;

    use super::*;
    use crate::alarms::AlarmState;
    use crate::orders::{ActKind, OrderState, Reading};

    #[test]
    fn a_refusal_says_where_and_what_is_allowed() {
        let order = |pointer: &str, why| {
            let refusal = Refusal { pointer: pointer.to_owned(), why };
            serde_json::to_value(Problem::order_refused(&refusal)).unwrap()
        };
        let why = RefusalWhy::NotFrom { state: OrderState::Draft, act: ActKind::Start };
        let p = order("", why);
        assert_eq!((&p["status"], p.get("errors")), (&json!(409), None));
        assert_eq!(
            p["detail"],
            "Start does not follow draft: approve, reject or cancel can follow."
        );
        let p = order("/actuals/steps/1/verified/ph", RefusalWhy::ReadingMissing(Reading::Ph));
        assert_eq!(p["status"], 422);
        assert_eq!(p["errors"][0]["pointer"], "/actuals/steps/1/verified/ph");
        let p = order(
            "/steps/2/ph",
            RefusalWhy::PhBeyondMembrane { value: 12.0, low: 2.0, high: 11.0 },
        );
        assert_eq!(
            p["detail"],
            "In step 3 of the plan, pH 12 is outside the membrane's limits of 2 to 11."
        );
        let p = Problem::alarm_refused(AlarmRefused::NotFrom(AlarmState::Normal));
        assert_eq!(p.status, 409);
        let p = Problem::alarm_refused(AlarmRefused::UntilOutOfReach);
        assert_eq!((p.status, p.errors[0].pointer.as_deref()), (422, Some("/until")));
    }
}
