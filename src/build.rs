//! The main job: a recipe to cells.
//!
//! Reads top to bottom as the pipeline: composition, ions, host, interstices, seats, size; then patterns (which
//! interstices are filled), supercells and orders (who fills them), structures, and the rules that judge them.

use crate::crystal::neighbours::NeighbourList;
use crate::crystal::symmetry::{self, TOLERANCE};
use crate::crystal::{Fractional, Lattice, Occupant, Site, Structure, Transformation, supercell};
use crate::error::{Error, MAX_ATOMS, shown};
use crate::filling::{Class, Filling, Kind};
use crate::ion::amount::to_f64;
use crate::ion::composition::Composition;
use crate::ion::{Amount, Species, formula, oxidation};
use crate::metric::{self, Size};
use crate::ordering::{self, Apart, Parent, Problem, Progress, Search};
use crate::packing::{Host, HostError, Interstice, Sign, Templates, interstices, survey};
use crate::recipe::{CellChoice, MAX_KEEP, Order, Pattern, Recipe};
use crate::rules::{self, Finding, Terms};
use crate::seating::{self, Plan, SeatRequest, Seating};
use num_traits::Zero;
use std::sync::Arc;

/// Everything decided before any cell is filled.
#[derive(Clone, Debug)]
pub struct Decision {
    /// Ions and amounts.
    pub composition: Composition,
    /// Doubts about charges, seats and vacancies, as sentences.
    pub cautions: Vec<String>,
    /// The packing.
    pub host: Host,
    /// Its interstices.
    pub interstices: Vec<Interstice>,
    /// Assignments, best first.
    pub seating: Seating,
    /// Size of the packing under the best assignment.
    pub size: Size,
}

/// One finished cell.
#[derive(Clone, Debug)]
pub struct Cell {
    /// The structure, P1.
    pub structure: Structure,
    /// The supercell of the primitive cell.
    pub transformation: Transformation,
    /// Number of the pattern it orders, from 1; 1 if pattern and order were decided together.
    pub pattern: usize,
    /// Electrostatic energy of formal charges, eV per packing sphere; `None` for shared sites.
    pub energy: Option<f64>,
    /// Equivalent orderings of the cell; 0 where not counted.
    pub degeneracy: u128,
    /// What the rules found.
    pub findings: Vec<Finding>,
}

/// Cells, best first, and how they came about.
#[derive(Clone, Debug)]
pub struct Built {
    /// The decision they rest on.
    pub decision: Decision,
    /// Best first.
    pub cells: Vec<Cell>,
    /// How the lowest were found, where they were sought.
    pub search: Option<Search>,
    /// The recipe with every default filled in.
    pub recipe: Recipe,
    /// The composition really built, if `nearest` changed it.
    pub nearest: Option<String>,
}

/// Decides ions, seats and size.
///
/// # Errors
/// [`Error`] of any stage.
pub fn decide(recipe: &Recipe) -> Result<Decision, Error> {
    let formula = formula::parse(&recipe.composition)?;
    let assignment = oxidation::assign(&formula)?;
    let composition = assignment.best;
    oxidation::refuse_complex_ions(&composition)?;
    let host = host(recipe)?;
    let (requests, packed) = match &recipe.seats {
        Some(text) => SeatRequest::parse_list(text, &composition, &host)?,
        None => Default::default(),
    };
    let found = places(&host, &requests)?;
    let offers = seating::offers(&host, &found);
    let spheres = seating::sphere_count(&composition);
    let (members, vacancies) = seating::members(&composition, &host, &spheres, &packed, &requests, recipe.radii)?;
    let seating = seating::decide(&composition, &host.name, offers, &requests, (spheres, members), recipe.radii)?;
    let size = metric::fit(&composition, &seating, &seating.plans[0], recipe.radii, recipe.size)?;
    let mut cautions = assignment.cautions;
    cautions.extend(seating.spheres.assumption.clone());
    cautions.extend(vacancies);
    cautions.extend(seating.notes.iter().cloned());
    if let [best, next, ..] = seating.plans.as_slice()
        && requests.is_empty()
        && next.penalty - best.penalty < seating::NEAR_TIE
    {
        cautions.push("the seats are a near tie with the next assignment; decide with `--seats`".into());
    }
    Ok(Decision { composition, cautions, host, interstices: found, seating, size })
}

/// The host that a recipe names, by its own template if it brings one.
fn host(recipe: &Recipe) -> Result<Host, Error> {
    let Some(template) = &recipe.template else { return Ok(Host::parse(&recipe.packing)?) };
    let mut templates = Templates::embedded().clone();
    templates.add("template of the recipe", &template.to_string()).map_err(HostError::from)?;
    Ok(Host::parse_with(&recipe.packing, &templates)?)
}

/// The interstices of a host, and the saddles of those kinds that are asked for by name and are no interstices of it.
fn places(host: &Host, requests: &[SeatRequest]) -> Result<Vec<Interstice>, Error> {
    let mut found = interstices(host)?;
    let lacking: Vec<_> = requests.iter().map(|r| r.kind).filter(|k| found.iter().all(|h| h.kind != *k)).collect();
    if !lacking.is_empty() {
        found.extend(survey(host)?.saddles.into_iter().filter(|s| lacking.contains(&s.kind)));
    }
    Ok(found)
}

/// Builds the cells of a recipe.
///
/// # Errors
/// [`Error`] of any stage; a broken rule is a finding, not an error.
pub fn build(recipe: &Recipe, progress: &Progress) -> Result<Built, Error> {
    let recipe = recipe.resolved();
    check_limits(&recipe)?;
    let decision = decide(&recipe)?;
    let plan = &decision.seating.plans[0];
    let filling = host_filling(&decision, plan)?;
    let mut cells = Vec::new();
    let (mut search, mut nearest) = (None, None);
    for (number, pattern) in patterns(&recipe, &filling, progress)?.into_iter().enumerate() {
        for transformation in transformations(&recipe, &pattern, &decision.composition)? {
            let counts = match pattern.counts(transformation.index()) {
                Some(counts) => counts,
                None if recipe.nearest => {
                    let counts = pattern.nearest(transformation.index()).ok_or_else(|| Error::NothingNear {
                        index: transformation.index(),
                        composition: recipe.composition.clone(),
                    })?;
                    nearest = Some(pattern.describe(&counts));
                    counts
                }
                None if recipe.order == Order::Average => Vec::new(),
                None => return Err(does_not_fit(&recipe, &pattern, transformation.index())),
            };
            let job = Job { recipe: &recipe, pattern: &pattern, number: number + 1, transformation };
            cells.extend(job.cells(counts, &mut search, progress)?);
        }
    }
    rank(&mut cells, &recipe);
    let keep = recipe.keep.unwrap_or(1);
    cells.truncate(keep);
    for cell in &mut cells {
        let promised = promised(&cell.structure, &filling);
        let terms = Terms { limits: recipe.limits, radii: recipe.radii, promised: &promised };
        cell.findings = rules::judge(&cell.structure, &terms);
    }
    Ok(Built { decision, cells, search, recipe, nearest })
}

fn check_limits(recipe: &Recipe) -> Result<(), Error> {
    let limit = |what, asked: String, limit: String| Err(Error::Limit { what, asked, limit });
    match &recipe.cell {
        CellChoice::Atoms(n) if *n > MAX_ATOMS => {
            return limit("a number of atoms", n.to_string(), MAX_ATOMS.to_string());
        }
        CellChoice::Atoms(0) | CellChoice::UpTo(0) => return limit("a size", "0".into(), "1 at least".into()),
        CellChoice::Span(s) if !(*s > 0.0 && *s <= MAX_SPAN) => {
            return limit("a span", format!("{s} Å"), format!("above 0 and at most {MAX_SPAN} Å"));
        }
        CellChoice::UpTo(n) if *n > MAX_UP_TO => return limit("an index", n.to_string(), MAX_UP_TO.to_string()),
        CellChoice::UpTo(_) if !matches!(recipe.order, Order::Lowest | Order::Every) => {
            return Err(Error::Option {
                option: "--up-to",
                given: format!("{:?}", recipe.order).to_lowercase(),
                reason: "supercells are searched for the orders `every` and `lowest` only".into(),
            });
        }
        _ => {}
    }
    match recipe.keep {
        Some(0) => limit("a number of cells", "0".into(), "1 at least".into()),
        Some(n) if n > MAX_KEEP => limit("a number of cells", n.to_string(), MAX_KEEP.to_string()),
        _ => match recipe.formats.iter().find(|f| !["cif", "xyz"].contains(&f.as_str())) {
            Some(format) => Err(Error::Option {
                option: "--as",
                given: format.clone(),
                reason: "formats are `cif` and `xyz`".into(),
            }),
            None => Ok(()),
        },
    }
}

/// Longest span accepted, Å.
pub const MAX_SPAN: f64 = 500.0;

/// Largest index up to which all supercells are searched.
pub const MAX_UP_TO: usize = 64;

/// The host with its used interstices, and what they hold per primitive cell.
fn host_filling(decision: &Decision, plan: &Plan) -> Result<Filling, Error> {
    let host = &decision.host;
    let of_role = |wanted: &dyn Fn(usize) -> bool| -> Vec<Fractional> {
        host.spheres.iter().zip(&host.role).filter(|(_, r)| wanted(**r)).map(|(p, _)| *p).collect()
    };
    let mut positions = of_role(&|r| host.roles[r].ion == Sign::Anion);
    let per_cell = Amount::from(positions.len() as i128) / decision.seating.spheres.spheres;
    let mut kinds: Vec<Kind> = vec![Kind::vacancy()];
    let mut classes: Vec<Class> = Vec::new();
    let anions: Vec<(usize, Amount)> = decision
        .composition
        .anions()
        .map(|(ion, amount)| {
            kinds.push(Kind::of((*ion).into()));
            (kinds.len() - 1, amount * per_cell)
        })
        .collect();
    classes.push(Class { name: "packing".into(), reach: 0.0, amounts: anions });
    let mut class = vec![0; positions.len()];
    for (r, role) in host.roles.iter().enumerate() {
        let members = || decision.seating.members.iter().filter(move |m| m.role == r);
        let Some(first) = members().next() else { continue };
        let reach = first.distance * decision.size.scale;
        let amounts = members().map(|m| (kind_of(&mut kinds, m.ion.into()), m.amount * per_cell)).collect();
        let places = of_role(&|other| other == r);
        class.extend(vec![classes.len(); places.len()]);
        positions.extend(places);
        classes.push(Class { name: role.name.clone(), reach, amounts });
    }
    for (o, offer) in decision.seating.offers.iter().enumerate() {
        let amounts: Vec<(usize, Amount)> = plan
            .seats
            .iter()
            .filter(|seat| seat.offer == o)
            .map(|seat| (kind_of(&mut kinds, seat.ion.into()), seat.amount * per_cell))
            .collect();
        if amounts.is_empty() {
            continue;
        }
        for &hole in &offer.interstices {
            positions.push(decision.interstices[hole].position);
            class.push(classes.len());
        }
        let reach = offer.reach * decision.size.scale;
        classes.push(Class { name: offer.kind.to_string(), reach, amounts });
    }
    let lattice = decision.host.lattice.scaled(decision.size.scale)?;
    Ok(Filling { parent: Parent { lattice, positions, class }, kinds, classes })
}

/// Index of a species among the kinds, to which it is added if new.
fn kind_of(kinds: &mut Vec<Kind>, species: Species) -> usize {
    kinds.iter().position(|k| k.species == Some(species)).unwrap_or_else(|| {
        kinds.push(Kind::of(species));
        kinds.len() - 1
    })
}

/// The crystals to be ordered: the host itself where pattern and order are decided together, else the host with its
/// interstices filled by average cations, reduced to the primitive cell.
fn patterns(recipe: &Recipe, filling: &Filling, progress: &Progress) -> Result<Vec<Filling>, Error> {
    let pattern = recipe.pattern.unwrap_or(Pattern::Joint);
    if pattern == Pattern::Joint {
        return Ok(vec![filling.clone()]);
    }
    let average = filling.averaged();
    let index = average.smallest_index();
    let cell = supercell::most_compact(&average.parent.lattice, index).unwrap_or_else(Transformation::identity);
    let counts = average.counts(cell.index()).unwrap_or_default();
    let problem = Problem::new(&average.parent, &cell, average.contents(&counts, cell.index()), average.charges())?;
    let orderings = match pattern {
        Pattern::Every => ordering::every(&problem, progress)?,
        Pattern::Random => ordering::random(&problem, 1, recipe.seed, &[], progress)?,
        _ => ordering::lowest(&problem, 1, recipe.seed, progress)?.orderings,
    };
    orderings.iter().map(|o| patterned(filling, &problem, &o.kinds)).collect()
}

/// The primitive cell of the filled sites of a pattern.
fn patterned(filling: &Filling, problem: &Problem, kinds: &[u8]) -> Result<Filling, Error> {
    let filled: Vec<usize> = (0..kinds.len()).filter(|i| kinds[*i] != 0).collect();
    let positions: Vec<Fractional> = filled.iter().map(|i| problem.positions[*i]).collect();
    let class: Vec<i32> = filled.iter().map(|i| problem.class[*i] as i32).collect();
    let (lattice, positions, source) = symmetry::primitive(&problem.lattice, &positions, &class, TOLERANCE)?;
    let class: Vec<usize> = source.iter().map(|i| class[*i] as usize).collect();
    Ok(filling.moved_to(Parent { lattice, positions, class }))
}

/// The supercells that the recipe asks for.
fn transformations(
    recipe: &Recipe,
    filling: &Filling,
    composition: &Composition,
) -> Result<Vec<Transformation>, Error> {
    let lattice = &filling.parent.lattice;
    let average = recipe.order == Order::Average;
    let step = if recipe.nearest || average { 1 } else { filling.smallest_index() };
    let most_compact = |index: usize| {
        supercell::most_compact(lattice, index).ok_or_else(|| Error::Limit {
            what: "a supercell",
            asked: format!("{index} primitive cells"),
            limit: format!("{} primitive cells", supercell::MAX_INDEX),
        })
    };
    let atoms = |index: usize| filling.atoms() * Amount::from(index as i128);
    let too_small = |limit: String| Error::TooSmall {
        limit,
        composition: composition.formula_text(),
        smallest: format!("{} atoms (index {step})", shown(&atoms(step))),
    };
    let cells = match &recipe.cell {
        CellChoice::Smallest => vec![most_compact(step)?],
        CellChoice::Transformation(text) => vec![Transformation::parse(text)?],
        CellChoice::Atoms(n) => {
            let index = (Amount::from(*n as i128) / (filling.atoms() * Amount::from(step as i128))).to_integer()
                as usize
                * step;
            if index == 0 {
                return Err(too_small(format!("{n} atoms")));
            }
            vec![most_compact(index)?]
        }
        CellChoice::Span(span) => {
            let most = (MAX_ATOMS as f64 / to_f64(&filling.atoms())) as usize;
            vec![supercell::spanning(lattice, step, *span, most).ok_or_else(|| Error::Limit {
                what: "a span",
                asked: format!("{span} Å"),
                limit: format!("{MAX_ATOMS} atoms"),
            })?]
        }
        CellChoice::UpTo(n) => {
            let kinds: Vec<i32> = filling.parent.class.iter().map(|c| *c as i32).collect();
            let (operations, _) = symmetry::operations(lattice, &filling.parent.positions, &kinds, TOLERANCE)?;
            let cells: Vec<Transformation> = (step..=*n)
                .step_by(step)
                .flat_map(|index| supercell::distinct(index, &operations))
                .filter_map(|form| supercell::compact(lattice, &form))
                .collect();
            if cells.is_empty() {
                return Err(too_small(format!("index {n}")));
            }
            cells
        }
    };
    match cells.iter().map(|c| atoms(c.index())).max() {
        Some(n) if n > Amount::from(MAX_ATOMS as i128) => {
            Err(Error::Limit { what: "a number of atoms", asked: shown(&n), limit: MAX_ATOMS.to_string() })
        }
        _ => Ok(cells),
    }
}

fn does_not_fit(recipe: &Recipe, filling: &Filling, index: usize) -> Error {
    let step = filling.smallest_index();
    let nearest = filling.nearest(index).map(|counts| {
        format!("; the nearest neutral amounts here are {} (`--nearest` takes them)", filling.describe(&counts))
    });
    Error::DoesNotFit {
        index,
        composition: recipe.composition.clone(),
        would_hold: filling.fractional(index),
        fitting: (1..=3).map(|k| (k * step).to_string()).collect::<Vec<_>>().join(", "),
        nearest: nearest.unwrap_or_default(),
    }
}

/// One supercell of one pattern.
struct Job<'a> {
    recipe: &'a Recipe,
    pattern: &'a Filling,
    number: usize,
    transformation: Transformation,
}

impl Job<'_> {
    fn cells(
        &self,
        counts: Vec<Vec<usize>>,
        search: &mut Option<Search>,
        progress: &Progress,
    ) -> Result<Vec<Cell>, Error> {
        if self.recipe.order == Order::Average {
            return Ok(vec![self.shared()?]);
        }
        let filling = self.pattern;
        let problem = Problem::new(
            &filling.parent,
            &self.transformation,
            filling.contents(&counts, self.transformation.index()),
            filling.charges(),
        )?;
        let keep = self.recipe.keep.unwrap_or(1);
        let orderings = match self.recipe.order {
            Order::Every => ordering::every(&problem, progress)?,
            Order::Random => {
                let apart = parse_apart(&self.recipe.apart, filling)?;
                ordering::random(&problem, keep, self.recipe.seed, &apart, progress)?
            }
            _ => {
                let found = ordering::lowest(&problem, keep, self.recipe.seed, progress)?;
                // One annealed cell makes the whole search one that proves nothing.
                if search.is_none_or(|s| s == Search::Exhaustive) {
                    *search = Some(found.search);
                }
                found.orderings
            }
        };
        let up_to = matches!(self.recipe.cell, CellChoice::UpTo(_));
        let spheres = problem.class.iter().filter(|c| **c == 0).count() as f64;
        Ok(orderings
            .into_iter()
            .filter(|o| !(up_to && problem.is_superperiodic(&o.kinds)))
            .map(|o| Cell {
                structure: self.structure(&problem, &o.kinds),
                transformation: self.transformation,
                pattern: self.number,
                energy: Some(o.energy / spheres),
                degeneracy: o.degeneracy,
                findings: Vec::new(),
            })
            .collect())
    }

    fn structure(&self, problem: &Problem, kinds: &[u8]) -> Structure {
        let sites = problem.positions.iter().zip(kinds).filter_map(|(position, kind)| {
            let species = self.pattern.kinds[usize::from(*kind)].species?;
            Some(Site::full(*position, species))
        });
        let sites = sites.collect();
        Structure { lattice: oriented(&problem.lattice), sites }
    }

    /// Every site of a class shared by all that sit there.
    fn shared(&self) -> Result<Cell, Error> {
        let filling = self.pattern;
        let cosets = supercell::Cosets::new(&self.transformation);
        let lattice = supercell::lattice_of(&filling.parent.lattice, &self.transformation)?;
        let inverse = self.transformation.matrix().map(f64::from).try_inverse().unwrap_or_default();
        let mut sites = Vec::new();
        for (position, class) in filling.parent.positions.iter().zip(&filling.parent.class) {
            let n = Amount::from(filling.sites_in(*class) as i128);
            let occupants: Arc<[Occupant]> = filling.classes[*class]
                .amounts
                .iter()
                .filter_map(|(kind, amount)| {
                    let species = filling.kinds[*kind].species?;
                    Some(Occupant { species, occupancy: amount / n })
                })
                .filter(|o| !o.occupancy.is_zero())
                .collect();
            for t in 0..cosets.len() {
                let p = Fractional(inverse * (position.0 + cosets.translation(t).map(f64::from))).reduced();
                sites.push(Site { position: p, occupants: occupants.clone() });
            }
        }
        Ok(Cell {
            structure: Structure { lattice: oriented(&lattice), sites },
            transformation: self.transformation,
            pattern: self.number,
            energy: None,
            degeneracy: 0,
            findings: Vec::new(),
        })
    }
}

/// a along x, b in the xy plane, as files have it.
fn oriented(lattice: &Lattice) -> Lattice {
    lattice.oriented().unwrap_or_else(|_| lattice.clone())
}

/// Reads `Gd-Gd:3.6`.
fn parse_apart(texts: &[String], filling: &Filling) -> Result<Vec<Apart>, Error> {
    let mut rules = Vec::new();
    for text in texts {
        let fail = |reason: String| Error::Option { option: "--apart", given: text.clone(), reason };
        let (pair, distance) = text
            .rsplit_once(':')
            .ok_or_else(|| fail("write a pair and a distance in Å, for example `Gd-Gd:3.6`".into()))?;
        let (first, second) = pair
            .split_once('-')
            .ok_or_else(|| fail("write two elements with a hyphen, for example `Gd-Gd:3.6`".into()))?;
        let distance: f64 = distance
            .trim()
            .parse()
            .ok()
            .filter(|d| *d > 0.0 && *d <= MAX_SPAN)
            .ok_or_else(|| fail(format!("`{distance}` is no distance above 0 and at most {MAX_SPAN} Å")))?;
        let kinds = |name: &str| -> Result<Vec<u8>, Error> {
            let found = filling.kinds_named(name.trim());
            if found.is_empty() {
                Err(fail(format!("`{}` does not occur in this cell", name.trim())))
            } else {
                Ok(found)
            }
        };
        for a in kinds(first)? {
            for b in kinds(second)? {
                rules.push(Apart { first: a, second: b, distance, name: pair.trim().into() });
            }
        }
    }
    Ok(rules)
}

/// By energy per packing sphere where there is one, smaller cells first among equals.
fn rank(cells: &mut [Cell], recipe: &Recipe) {
    if recipe.order == Order::Random || recipe.order == Order::Average {
        return;
    }
    let key = |c: &Cell| (c.energy.unwrap_or(f64::INFINITY) * 1e6).round();
    cells.sort_by(|a, b| key(a).total_cmp(&key(b)).then(a.structure.sites.len().cmp(&b.structure.sites.len())));
}

/// How many anions each cation's interstice has around it in this cell: those within the distance of the interstice's
/// own spheres; vacant spheres do not count.
fn promised(structure: &Structure, filling: &Filling) -> Vec<Option<usize>> {
    const SLACK: f64 = 1.01;
    let charge = |site: &Site| -> i32 { site.occupants.iter().filter_map(|o| o.species.charge).map(i32::from).sum() };
    let reach = |site: &Site| -> Option<f64> {
        let species = site.occupants.first()?.species;
        let kind = filling.kinds.iter().position(|k| k.species == Some(species))?;
        let mut of_kind = filling.classes.iter().filter(|c| c.amounts.iter().any(|a| a.0 == kind)).map(|c| c.reach);
        // An ion in two kinds of interstice has two distances: told apart by the nearest anion instead.
        let first = of_kind.next()?;
        of_kind.next().is_none().then_some(first)
    };
    let positions = structure.positions();
    let longest = filling.classes.iter().map(|c| c.reach).fold(0.0, f64::max) * SLACK;
    let list = NeighbourList::new(&structure.lattice, &positions, longest);
    structure
        .sites
        .iter()
        .enumerate()
        .map(|(idx, site)| {
            if charge(site) <= 0 {
                return None;
            }
            let reach = reach(site)? * SLACK;
            Some(list.of(idx, reach).iter().filter(|n| charge(&structure.sites[n.index]) < 0).count())
        })
        .collect()
}

/// Formula units of the composition in a structure, if every amount agrees.
pub fn formula_units(structure: &Structure, composition: &Composition) -> Option<Amount> {
    let amounts = structure.amounts();
    let of = |i: &(crate::ion::Ion, Amount)| amounts.get(&i.0.into()).map(|n| n / i.1);
    let first = of(composition.ions.first()?)?;
    composition.ions.iter().all(|i| of(i) == Some(first)).then_some(first)
}
