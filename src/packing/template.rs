//! Packings described in JSON files, `templates/hosts/*.json`.
//!
//! ```json
//! {
//!   "name": "body-centred-tetragonal",
//!   "title": "body-centred tetragonal array",
//!   "source": "where cell and positions come from",
//!   "hall_symbol": "-I 4 2",
//!   "parameters": { "ca": { "meaning": "c/a", "ideal": 1, "minimum": 0.8, "maximum": 1.6 } },
//!   "cell": { "a": "4/sqrt(2+ca*ca)", "b": "…", "c": "…", "alpha": 90, "beta": 90, "gamma": 90 },
//!   "roles": [ { "name": "X", "ion": "anion", "radius": 1 } ],
//!   "spheres": [ { "role": "X", "at": [0, 0, 0] } ]
//! }
//! ```
//!
//! `hall_symbol` names the space group and its setting (International Tables B, section 1.4, appendix); `spheres` are the
//! asymmetric unit. Numbers may be arithmetic over the parameters (see `expression`). Lengths have any unit; ratios refer
//! to the radius of the first role. A user's file may replace an embedded template of the same name.

use super::expression;
use super::host::{Host, HostError, Role, Sign};
use crate::crystal::symmetry::{self, SpaceGroup};
use crate::crystal::{Fractional, Lattice, Parameters};
use serde::Deserialize;
use serde_json::{Value, json};
use std::collections::BTreeMap;
use std::fmt;
use std::sync::LazyLock;

/// A template that cannot be used.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
#[error("template `{file}`, {path}: {reason}")]
pub struct TemplateError {
    /// Its file, or its name if it is embedded.
    pub file: String,
    /// Place in the document, `spheres[0].at[1]`.
    pub path: String,
    /// What is wrong and what would be accepted.
    pub reason: String,
}

/// A packing to be built.
#[derive(Clone, Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Template {
    /// What the user calls it: letters, digits, hyphens.
    pub name: String,
    /// What it is, in a line.
    pub title: String,
    /// Where cell and positions come from.
    pub source: String,
    hall_symbol: String,
    #[serde(default)]
    parameters: BTreeMap<String, Parameter>,
    cell: Cell,
    roles: Vec<RoleText>,
    spheres: Vec<Sphere>,
    #[serde(skip)]
    file: String,
    #[serde(skip)]
    document: Value,
}

/// A free parameter.
#[derive(Clone, Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Parameter {
    /// What it is.
    pub meaning: String,
    /// Value if none is given.
    ideal: Number,
    minimum: f64,
    maximum: f64,
}

impl fmt::Display for Parameter {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let ideal = match &self.ideal {
            Number::Value(value) => value.to_string(),
            Number::Text(text) => text.clone(),
        };
        write!(f, "{}, {} to {}, {ideal} if not given", self.meaning, self.minimum, self.maximum)
    }
}

#[derive(Clone, Debug, Deserialize)]
#[serde(deny_unknown_fields)]
struct Cell {
    a: Number,
    b: Number,
    c: Number,
    alpha: Number,
    beta: Number,
    gamma: Number,
}

#[derive(Clone, Debug, Deserialize)]
#[serde(deny_unknown_fields)]
struct RoleText {
    name: String,
    ion: Sign,
    radius: Number,
}

#[derive(Clone, Debug, Deserialize)]
#[serde(deny_unknown_fields)]
struct Sphere {
    role: String,
    at: [Number; 3],
}

/// A number, or arithmetic that gives one.
#[derive(Clone, Debug, Deserialize)]
#[serde(untagged, expecting = "a number or arithmetic in quotes, such as 0.25 or \"3/8+u\"")]
enum Number {
    Value(f64),
    Text(String),
}

/// Largest file read, bytes.
pub const MAX_FILE: usize = 1 << 20;

/// Longest cell edge over the radius of the packing sphere.
const MAX_EDGE: f64 = 1e3;

/// Largest radius over that of the first role; its inverse is the least.
const MAX_RADIUS: f64 = 10.0;

/// Positions nearer to each other than this share of the packing sphere's radius are one.
const SAME_PLACE: f64 = 1e-3;

/// Spheres of a template lie at least so far apart, in radii of the packing sphere.
const MIN_DISTANCE: f64 = 0.5;

/// The least symmetric of metric tensors accepted as that of the group, as a share of its largest element.
const METRIC_TOLERANCE: f64 = 1e-6;

const EMBEDDED: [(&str, &str); 8] = [
    ("argyrodite", include_str!("../../templates/hosts/argyrodite.json")),
    ("bixbyite", include_str!("../../templates/hosts/bixbyite.json")),
    ("body-centred-tetragonal", include_str!("../../templates/hosts/body-centred-tetragonal.json")),
    ("fluorite-cations", include_str!("../../templates/hosts/fluorite-cations.json")),
    ("garnet-cations", include_str!("../../templates/hosts/garnet-cations.json")),
    ("layer-pairs", include_str!("../../templates/hosts/layer-pairs.json")),
    ("pyrochlore", include_str!("../../templates/hosts/pyrochlore.json")),
    ("scheelite-cations", include_str!("../../templates/hosts/scheelite-cations.json")),
];

/// Templates by name.
#[derive(Clone, Debug, Default)]
pub struct Templates {
    by_name: BTreeMap<String, Template>,
}

impl Templates {
    /// Those that come with the program.
    pub fn embedded() -> &'static Self {
        static EMBEDDED_TEMPLATES: LazyLock<Templates> = LazyLock::new(|| {
            let mut templates = Templates::default();
            for (name, text) in EMBEDDED {
                // Unusable ones cannot slip in: a test adds each and builds its host.
                let _ = templates.add(name, text);
            }
            templates
        });
        &EMBEDDED_TEMPLATES
    }

    /// Adds the template that a file holds, replacing one of the same name.
    ///
    /// # Errors
    /// [`TemplateError`] with the place in the document.
    pub fn add(&mut self, file: &str, text: &str) -> Result<(), TemplateError> {
        let fail = |path: &str, reason: String| TemplateError { file: file.into(), path: path.into(), reason };
        if text.len() > MAX_FILE {
            return Err(fail("whole file", format!("{} bytes; at most {MAX_FILE} are read", text.len())));
        }
        let mut json = serde_json::Deserializer::from_str(text);
        let mut template: Template = serde_path_to_error::deserialize(&mut json)
            .map_err(|e| fail(&e.path().to_string(), e.inner().to_string()))?;
        json.end().map_err(|e| fail("end", e.to_string()))?;
        template.file = file.into();
        template.document = serde_json::from_str(text).unwrap_or_default();
        let word = |c: char| c.is_ascii_alphanumeric() || c == '-';
        let reserved = super::host::NAMED.contains(&template.name.as_str())
            || ["stack", "layers", "ax3"].contains(&template.name.as_str());
        if template.name.is_empty() || !template.name.chars().all(word) || reserved {
            let reason = format!(
                "`{}` cannot be the name; take letters, digits and hyphens, no name of a packing built without a template",
                template.name
            );
            return Err(fail("name", reason));
        }
        template.layout(&BTreeMap::new())?;
        self.by_name.insert(template.name.clone(), template);
        Ok(())
    }

    /// The template of this name.
    pub fn get(&self, name: &str) -> Option<&Template> {
        self.by_name.get(name)
    }

    /// All names, sorted.
    pub fn names(&self) -> impl Iterator<Item = &str> {
        self.by_name.keys().map(String::as_str)
    }
}

/// A template with its numbers worked out.
struct Layout {
    cell: Parameters,
    spheres: Vec<Fractional>,
    role: Vec<usize>,
    roles: Vec<Role>,
}

/// A host written as a template of this name, in P 1: what [`Templates::add`] makes the same host of.
pub fn document(name: &str, host: &Host) -> Value {
    let Parameters { a, b, c, alpha, beta, gamma } = host.lattice.parameters();
    let roles = host.roles.iter().map(|r| json!({ "name": r.name, "ion": r.ion, "radius": r.radius }));
    let spheres = host.spheres.iter().zip(&host.role);
    let spheres = spheres.map(|(p, r)| json!({ "role": host.roles[*r].name, "at": [p.0.x, p.0.y, p.0.z] }));
    json!({
        "name": name,
        "title": host.name,
        "source": format!("spheres of {}", host.name),
        "hall_symbol": "P 1",
        "cell": { "a": a, "b": b, "c": c, "alpha": alpha, "beta": beta, "gamma": gamma },
        "roles": roles.collect::<Vec<_>>(),
        "spheres": spheres.collect::<Vec<_>>(),
    })
}

impl Template {
    /// The template as it stands in its file.
    pub fn document(&self) -> &Value {
        &self.document
    }

    /// Its free parameters by name.
    pub fn parameters(&self) -> &BTreeMap<String, Parameter> {
        &self.parameters
    }

    /// The packing with these values of its parameters, ideal ones where none is given.
    ///
    /// # Errors
    /// [`HostError`] for an unknown parameter, a value out of range, or values that give no packing.
    pub fn host(&self, name: &str, given: &BTreeMap<String, f64>) -> Result<Host, HostError> {
        let fail = |reason| HostError::Parameter { name: name.into(), reason };
        for (parameter, value) in given {
            let Some(p) = self.parameters.get(parameter) else {
                let known: Vec<String> =
                    self.parameters.iter().map(|(n, p)| format!("`{n}` ({})", p.meaning)).collect();
                let known = if known.is_empty() { "it has none".into() } else { format!("take {}", known.join(", ")) };
                return Err(fail(format!("there is no parameter `{parameter}`; {known}")));
            };
            if !(p.minimum..=p.maximum).contains(value) {
                let range = format!("it must be {} to {}", p.minimum, p.maximum);
                return Err(fail(format!("`{parameter}` ({}) is {value}; {range}", p.meaning)));
            }
        }
        let Layout { cell, spheres, role, roles } = self.layout(given)?;
        Host::primitive(name, &cell, &spheres, &role, roles)
    }

    fn fail(&self, path: impl Into<String>, reason: impl Into<String>) -> TemplateError {
        TemplateError { file: self.file.clone(), path: path.into(), reason: reason.into() }
    }

    fn number(&self, path: &str, number: &Number, values: &BTreeMap<String, f64>) -> Result<f64, TemplateError> {
        match number {
            Number::Value(value) if value.is_finite() => Ok(*value),
            Number::Value(value) => Err(self.fail(path, format!("{value} is no finite number"))),
            Number::Text(text) => expression::value(text, values).map_err(|reason| self.fail(path, reason)),
        }
    }

    fn layout(&self, given: &BTreeMap<String, f64>) -> Result<Layout, TemplateError> {
        let values = self.values(given)?;
        let (roles, unit) = self.roles(&values)?;
        let group = self.group()?;
        let (cell, lattice) = self.cell(&values, unit, &group)?;
        let (mut spheres, mut role) = (Vec::new(), Vec::new());
        for (i, sphere) in self.spheres.iter().enumerate() {
            let index = roles.iter().position(|r| r.name == sphere.role).ok_or_else(|| {
                let known: Vec<&str> = roles.iter().map(|r| r.name.as_str()).collect();
                let reason = format!("there is no role `{}`; roles are {}", sphere.role, known.join(", "));
                self.fail(format!("spheres[{i}].role"), reason)
            })?;
            let at = |k: usize| self.number(&format!("spheres[{i}].at[{k}]"), &sphere.at[k], &values);
            let position = Fractional::new(at(0)?, at(1)?, at(2)?).reduced();
            for image in symmetry::orbit(&lattice, &group.operations, &position, SAME_PLACE) {
                if let Some(other) = spheres.iter().find(|s| lattice.distance(s, &image) < MIN_DISTANCE) {
                    let d = lattice.distance(other, &image);
                    let reason = format!(
                        "it, or an image of it, lies {d:.4} radii of the packing sphere from another sphere; {MIN_DISTANCE} is the least"
                    );
                    return Err(self.fail(format!("spheres[{i}].at"), reason));
                }
                spheres.push(image);
                role.push(index);
            }
        }
        if !role.contains(&0) {
            return Err(self.fail("spheres", format!("none has the first role, `{}`", roles[0].name)));
        }
        Ok(Layout { cell, spheres, role, roles })
    }

    fn values(&self, given: &BTreeMap<String, f64>) -> Result<BTreeMap<String, f64>, TemplateError> {
        let none = BTreeMap::new();
        let mut values = BTreeMap::new();
        for (name, parameter) in &self.parameters {
            let value = match given.get(name) {
                Some(value) => *value,
                None => self.number(&format!("parameters.{name}.ideal"), &parameter.ideal, &none)?,
            };
            if !(parameter.minimum..=parameter.maximum).contains(&value) {
                let range = format!("{} to {}", parameter.minimum, parameter.maximum);
                return Err(self.fail(format!("parameters.{name}"), format!("{value} lies outside {range}")));
            }
            values.insert(name.clone(), value);
        }
        Ok(values)
    }

    /// The roles with radii over that of the first, and the radius of the first in the template's unit of length.
    fn roles(&self, values: &BTreeMap<String, f64>) -> Result<(Vec<Role>, f64), TemplateError> {
        let mut roles: Vec<Role> = Vec::new();
        let mut unit = None;
        for (i, text) in self.roles.iter().enumerate() {
            if text.name.is_empty() || roles.iter().any(|r| r.name == text.name) {
                return Err(self.fail(format!("roles[{i}].name"), "each role wants a name of its own"));
            }
            let path = format!("roles[{i}].radius");
            let length = self.number(&path, &text.radius, values)?;
            let radius = length / *unit.get_or_insert(length);
            if !(length > 0.0 && (MAX_RADIUS.recip()..=MAX_RADIUS).contains(&radius)) {
                let range = format!("above 0, and within a factor of {MAX_RADIUS} of the first role's");
                return Err(self.fail(path, format!("a radius of {length}; it must be {range}")));
            }
            roles.push(Role { name: text.name.clone(), ion: text.ion, radius });
        }
        unit.map(|unit| (roles, unit)).ok_or_else(|| self.fail("roles", "there must be one at least"))
    }

    fn group(&self) -> Result<SpaceGroup, TemplateError> {
        (1..=530).filter_map(SpaceGroup::from_hall_number).find(|g| g.hall == self.hall_symbol).ok_or_else(|| {
            let reason = format!("`{}` is no Hall symbol of a tabulated setting; one is `-F 4 2 3`", self.hall_symbol);
            self.fail("hall_symbol", reason)
        })
    }

    fn cell(
        &self,
        values: &BTreeMap<String, f64>,
        unit: f64,
        group: &SpaceGroup,
    ) -> Result<(Parameters, Lattice), TemplateError> {
        let length = |name: &str, number: &Number| {
            let value = self.number(&format!("cell.{name}"), number, values)? / unit;
            if value > 0.0 && value <= MAX_EDGE {
                return Ok(value);
            }
            let limit = format!("above 0 and at most {MAX_EDGE}");
            Err(self.fail(format!("cell.{name}"), format!("{value} radii of the packing sphere; it must be {limit}")))
        };
        let angle = |name: &str, number: &Number| self.number(&format!("cell.{name}"), number, values);
        let c = &self.cell;
        let cell = Parameters {
            a: length("a", &c.a)?,
            b: length("b", &c.b)?,
            c: length("c", &c.c)?,
            alpha: angle("alpha", &c.alpha)?,
            beta: angle("beta", &c.beta)?,
            gamma: angle("gamma", &c.gamma)?,
        };
        let lattice = Lattice::from_parameters(&cell).map_err(|e| self.fail("cell", e.to_string()))?;
        let metric = lattice.metric();
        let kept = group.operations.iter().all(|operation| {
            let w = operation.rotation.map(f64::from);
            (w.transpose() * metric * w - metric).amax() <= METRIC_TOLERANCE * metric.amax()
        });
        let reason = || format!("it lacks the symmetry of space group {} ({})", group.number, group.hermann_mauguin);
        if kept { Ok((cell, lattice)) } else { Err(self.fail("cell", reason())) }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn embedded_templates_are_sound() {
        for (name, text) in EMBEDDED {
            let mut templates = Templates::default();
            templates.add(name, text).unwrap();
            let template = templates.get(name).expect("named as its file");
            assert!(!template.title.is_empty() && !template.source.is_empty(), "{name}");
            for (parameter, p) in template.parameters() {
                for value in [p.minimum, p.maximum] {
                    let given = BTreeMap::from([(parameter.clone(), value)]);
                    assert!(template.host(name, &given).is_ok(), "{name}: {parameter} = {value}");
                }
            }
        }
    }

    /// Each fault is told with its place in the document.
    #[test]
    fn faults_are_told_with_their_place() {
        let good = EMBEDDED.iter().find(|(name, _)| *name == "pyrochlore").map(|(_, text)| *text).unwrap();
        let message = |from: &str, to: &str| {
            assert!(good.contains(from), "{from}");
            Templates::default().add("mine.json", &good.replacen(from, to, 1)).unwrap_err().to_string()
        };
        for (from, to, path, reason) in [
            ("\"hall_symbol\"", "\"hall\"", "hall", "unknown field `hall`"),
            ("-F 4vw 2vw 3", "F d -3 m", "hall_symbol", "is no Hall symbol of a tabulated setting"),
            ("\"pyrochlore\"", "\"ccp\"", "name", "`ccp` cannot be the name"),
            ("\"pyrochlore\"", "\"a b\"", "name", "letters, digits and hyphens"),
            ("\"a\": 8", "\"a\": -8", "cell.a", "-8 radii of the packing sphere; it must be above 0"),
            ("\"a\": 8", "\"a\": 9", "cell", "lacks the symmetry of space group 227"),
            ("\"a\": 8", "\"a\": \"8*w\"", "cell.a", "character 3: expected a number, a parameter (x)"),
            ("\"alpha\": 90", "\"alpha\": 0", "cell", "above 0 and below 180"),
            ("\"radius\": 1", "\"radius\": 0", "roles[0].radius", "a radius of 0"),
            ("\"anion\"", "\"Anion\"", "roles[0].ion", "expected `anion` or `cation`"),
            ("\"role\": \"X\", \"at\": [\"x\"", "\"role\": \"Y\", \"at\": [\"x\"", "spheres[0].role", "roles are X"),
            ("[\"3/8\", \"3/8\", \"3/8\"]", "[\"3/8\", \"3/8\", \"3/8\", 0]", "spheres[1].at", "trailing"),
            (
                "[\"3/8\", \"3/8\", \"3/8\"]",
                "[\"3/8\", true, \"3/8\"]",
                "spheres[1].at[1]",
                "a number or arithmetic in quotes",
            ),
            ("[\"3/8\", \"3/8\", \"3/8\"]", "[\"3/8\", \"1/8\", \"1/8\"]", "spheres[1].at", "0.5 is the least"),
            ("\"ideal\": \"3/8\"", "\"ideal\": \"1/2\"", "parameters.x", "0.5 lies outside 0.3125 to 0.375"),
        ] {
            let found = message(from, to);
            let start = format!("template `mine.json`, {path}: ");
            assert!(found.starts_with(&start) && found.contains(reason), "{to}: {found}");
        }
        assert!(Templates::default().add("cut.json", &good[..200]).unwrap_err().to_string().contains("EOF"));
        let large = " ".repeat(MAX_FILE + 1);
        assert!(Templates::default().add("large.json", &large).unwrap_err().to_string().contains("at most 1048576"));
    }

    #[test]
    fn parameters_are_checked() {
        let message = |text: &str| Host::parse(text).unwrap_err().to_string();
        assert!(message("pyrochlore:x=0.4").contains("`x` (x of the anion in 48f) is 0.4; it must be 0.3125 to 0.375"));
        assert!(message("pyrochlore:y=0.4").contains("there is no parameter `y`; take `x`"));
        assert!(message("fluorite-cations:x=1").contains("it has none"));
        let mut own = Templates::embedded().clone();
        let text = EMBEDDED[0].1.replace("\"argyrodite\"", "\"mine\"");
        own.add("mine.json", &text).unwrap();
        assert_eq!(Host::parse_with("mine", &own).unwrap().spheres.len(), 6);
    }
}
