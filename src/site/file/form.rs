//! The serde forms of a site file, key for key as contract §1 names them.

use serde::Deserialize;
use serde::de::{self, MapAccess, Visitor, value::MapAccessDeserializer};

use super::number::Num;

/// The document.
#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct SiteForm {
    pub schema: String,
    pub name: Option<String>,
    pub words: Option<WordsForm>,
    pub rules: Option<String>,
    pub may_isolate_supply: Option<bool>,
    pub supply: SupplyForm,
    pub earthing: Option<EarthingForm>,
    pub boards: Vec<BoardForm>,
    pub equipment: Option<Vec<EquipmentForm>>,
    pub sources: Option<Vec<SourceForm>>,
}

#[derive(Clone, Copy, Debug, Deserialize)]
pub enum WordsForm {
    #[serde(rename = "au-nz")]
    AuNz,
    #[serde(rename = "iec")]
    Iec,
}

#[derive(Clone, Copy, Debug, Deserialize)]
pub enum SystemForm {
    #[serde(rename = "TN-C-S")]
    TnCS,
    #[serde(rename = "TN-S")]
    TnS,
    #[serde(rename = "TT")]
    Tt,
}

#[derive(Clone, Copy, Debug, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum MetalForm {
    Copper,
    Aluminium,
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct SupplyForm {
    pub phases: Option<u64>,
    pub volts: Option<Num>,
    pub hertz: Option<Num>,
    pub system: SystemForm,
    pub network_ohms: Option<Num>,
    pub network_x_over_r: Option<Num>,
    pub network_earth_ohms: Option<Num>,
    pub service: Option<ConductorForm>,
}

#[derive(Debug, Default, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct ConductorForm {
    pub metres: Option<Num>,
    pub mm2: Option<Num>,
    pub metal: Option<MetalForm>,
}

#[derive(Clone, Copy, Debug, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum LinkAtForm {
    Bar,
    Incoming,
}

#[derive(Debug, Default, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct EarthingForm {
    pub board: Option<String>,
    pub link: Option<bool>,
    pub link_at: Option<LinkAtForm>,
    pub main_earth: Option<ConductorForm>,
    pub electrode_ohms: Option<Num>,
    pub bonds: Option<Vec<BondForm>>,
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct BondForm {
    pub id: String,
    pub name: Option<String>,
    pub metres: Option<Num>,
    pub mm2: Option<Num>,
    pub metal: Option<MetalForm>,
    pub pipe_ohms: Option<Num>,
    pub street_metal: Option<bool>,
    pub street_ohms: Option<Num>,
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct BoardForm {
    pub id: String,
    pub name: Option<String>,
    pub fed_from: Option<FeedForm>,
    pub main_switch: Option<MainSwitchForm>,
    pub main_switches: Option<Vec<MainSwitchForm>>,
    pub rcds: Option<Vec<RcdForm>>,
    pub circuits: Vec<CircuitForm>,
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct MainSwitchForm {
    pub id: String,
    pub amps: Option<Num>,
    pub poles: Option<u64>,
    pub tariff: Option<String>,
}

#[derive(Clone, Copy, Debug, Deserialize)]
pub enum RcdTypeForm {
    #[serde(rename = "AC")]
    Ac,
    A,
    F,
    B,
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct RcdForm {
    pub id: String,
    pub ma: Option<Num>,
    #[serde(rename = "type")]
    pub kind: Option<RcdTypeForm>,
    pub poles: Option<u64>,
    pub delayed: Option<bool>,
    pub after: Option<String>,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Deserialize)]
pub enum PhaseForm {
    L1,
    L2,
    L3,
    L1L2L3,
}

#[derive(Clone, Copy, Debug, Deserialize)]
pub enum CurveForm {
    B,
    C,
    D,
    #[serde(rename = "fuse", alias = "gG")]
    Fuse,
}

#[derive(Debug, Default, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct BreakerForm {
    pub curve: Option<CurveForm>,
    pub amps: Option<Num>,
}

#[derive(Debug, Default, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct CableForm {
    pub mm2: Option<Num>,
    /// Outer `None`: left out (as large as `mm2`); inner `None`: written as null.
    #[serde(default, deserialize_with = "written")]
    pub pe_mm2: Option<Option<Num>>,
    pub metal: Option<MetalForm>,
}

fn written<'de, D: de::Deserializer<'de>>(
    deserializer: D,
) -> Result<Option<Option<Num>>, D::Error> {
    Option::<Num>::deserialize(deserializer).map(Some)
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct CircuitForm {
    pub id: String,
    pub name: Option<String>,
    pub rcd: Option<String>,
    pub main: Option<String>,
    pub phase: Option<PhaseForm>,
    pub breaker: Option<BreakerForm>,
    pub cable: Option<CableForm>,
    pub points: Vec<PointForm>,
}

#[derive(Clone, Copy, Debug, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum PointKindForm {
    Outlet,
    Fixed,
    Light,
    Switch,
    Junction,
    Isolator,
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct PointForm {
    pub id: String,
    pub name: Option<String>,
    pub metres: Option<Num>,
    pub from: Option<String>,
    pub kind: Option<PointKindForm>,
}

/// `"service"` or a submain.
#[derive(Debug)]
pub enum FeedForm {
    /// A word, which must be `service`.
    Word(String),
    /// A submain.
    Submain(Box<SubmainForm>),
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct SubmainForm {
    pub board: String,
    pub rcd: Option<String>,
    pub phase: Option<PhaseForm>,
    pub breaker: Option<BreakerForm>,
    pub cable: Option<CableForm>,
    pub metres: Option<Num>,
    pub link: Option<bool>,
    pub link_at: Option<LinkAtForm>,
    pub main_earth: Option<ConductorForm>,
    pub electrode_ohms: Option<Num>,
}

impl<'de> Deserialize<'de> for FeedForm {
    fn deserialize<D: de::Deserializer<'de>>(deserializer: D) -> Result<Self, D::Error> {
        struct FeedVisitor;
        impl<'de> Visitor<'de> for FeedVisitor {
            type Value = FeedForm;
            fn expecting(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
                f.write_str(
                    "\"service\" or {\"board\": …, \"breaker\": …, \"cable\": …, \"metres\": …}",
                )
            }
            fn visit_str<E: de::Error>(self, v: &str) -> Result<FeedForm, E> {
                Ok(FeedForm::Word(v.to_owned()))
            }
            fn visit_map<A: MapAccess<'de>>(self, map: A) -> Result<FeedForm, A::Error> {
                SubmainForm::deserialize(MapAccessDeserializer::new(map))
                    .map(|s| FeedForm::Submain(Box::new(s)))
            }
        }
        deserializer.deserialize_any(FeedVisitor)
    }
}

#[derive(Clone, Copy, Debug, Deserialize)]
pub enum ClassForm {
    I,
    II,
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct EquipmentForm {
    pub id: String,
    pub name: Option<String>,
    pub kind: Option<String>,
    pub at: String,
    pub watts: Option<Num>,
    pub class: Option<ClassForm>,
    pub plug: Option<bool>,
    pub touches: Option<Vec<String>>,
}

#[derive(Clone, Copy, Debug, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum SourceKindForm {
    PvInverter,
    Battery,
    Generator,
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct SourceForm {
    pub id: String,
    pub kind: SourceKindForm,
    pub at: String,
    pub watts: Option<Num>,
    pub backup: Option<bool>,
}
