//! Lists, a page at a time. A series names its pages itself: it has `points` for `items`.

use serde::Serialize;
use utoipa::ToSchema;

/// One page of a list.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct Page<T> {
    /// The items of this page.
    pub items: Vec<T>,
    /// Address of the next page; null on the last.
    pub next: Option<String>,
}

#[cfg(test)]
mod tests {
    use serde_json::json;
    use utoipa::{OpenApi, PartialSchema};

    use super::super::*;

    #[derive(OpenApi)]
    #[openapi(components(schemas(
        AlarmView,
        CleaningView,
        CyclesView,
        FoulingView,
        Page<AlarmView>,
        Page<CleaningView>,
        Page<ReceiptView>,
        Page<RecommendationView>,
        Page<TrainView>,
        Page<WorkOrderView>,
        PermeabilityView,
        PlantView,
        Problem,
    )))]
    struct Doc;

    #[test]
    fn schemas_have_names_of_their_own() {
        let doc = serde_json::to_value(Doc::openapi()).unwrap();
        let schemas = doc["components"]["schemas"].as_object().unwrap();
        // A page holds the schema of its own kind of item.
        for (page, field) in [
            ("Page_AlarmView", "response"),
            ("Page_CleaningView", "verdict"),
            ("Page_ReceiptView", "digest"),
            ("Page_RecommendationView", "clears_when"),
            ("Page_TrainView", "standing"),
            ("Page_WorkOrderView", "acceptance"),
        ] {
            let item = &schemas[page]["properties"]["items"]["items"]["properties"];
            assert!(item.get(field).is_some(), "{page}: {item}");
        }
        // Whatever is referred to is there.
        let text = doc.to_string();
        for reference in text.split("\"#/components/schemas/").skip(1) {
            let name = reference.split('"').next().unwrap();
            assert!(schemas.contains_key(name), "{name} is not in {:?}", schemas.keys());
        }
        let problem = &schemas["Problem"]["properties"];
        assert_eq!(problem["type"]["type"], json!("string"));
    }

    #[test]
    fn the_last_page_has_no_next() {
        let page = serde_json::to_value(Page { items: vec![1], next: None }).unwrap();
        assert_eq!(page, json!({"items": [1], "next": null}));
        let time = serde_json::to_value(PlantTime::schema()).unwrap();
        assert_eq!((&time["type"], &time["format"]), (&json!("string"), &json!("date-time")));
    }
}
