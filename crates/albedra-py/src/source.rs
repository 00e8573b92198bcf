//! Where light starts.

use albedra::{SourcePlace, Spread};
use glam::DVec3;
use pyo3::exceptions::PyValueError;
use pyo3::prelude::*;
use pyo3::types::{PyDict, PyString, PyTuple};

use crate::arrays::vector;
use crate::text::{self, fitting, number, quoted};

/// Where light starts, and in which directions.
///
/// `flux` is its radiant flux in W, or the energy of a pulse in J. Whether a source fits its enclosure is
/// checked by `Experiment`.
///
/// Examples
/// --------
/// >>> import albedra as al
/// >>> al.Source.point((0.2, 0, 0), flux=5.0)
/// Source.point((0.2, 0.0, 0.0), flux=5.0)
/// >>> al.Source.beam((0, 0, -0.2), (0, 0, 1), radius=0.01).flux
/// 1.0
/// >>> al.Source.wall("z-", cone=0.3)
/// Source.wall('z-', cone=0.3)
#[pyclass(frozen, eq, from_py_object, module = "albedra")]
#[derive(Clone, PartialEq)]
pub(crate) struct Source(pub(crate) albedra::Source);

/// The constructor that makes a source, with its arguments.
struct Call {
    name: &'static str,
    data: Vec<Argument>,
    options: Vec<(&'static str, Argument)>,
}

enum Argument {
    Number(f64),
    Vector(DVec3),
    Text(String),
}

impl Argument {
    fn to_python<'py>(&self, py: Python<'py>) -> PyResult<Bound<'py, PyAny>> {
        match self {
            Self::Number(x) => Ok(x.into_pyobject(py)?.into_any()),
            Self::Vector(v) => Ok((v.x, v.y, v.z).into_pyobject(py)?.into_any()),
            Self::Text(text) => Ok(text.into_pyobject(py)?.into_any()),
        }
    }

    fn written(&self, py: Python<'_>) -> PyResult<String> {
        match self {
            Self::Number(x) => Ok(number(*x)),
            Self::Vector(v) => Ok(text::vector(*v)),
            Self::Text(name) => quoted(py, name),
        }
    }
}

const HEMISPHERE: f64 = std::f64::consts::FRAC_PI_2;

impl Source {
    fn call(&self) -> Call {
        let source = &self.0;
        let (name, data) = match source.place() {
            SourcePlace::Point { position } => ("point", vec![Argument::Vector(*position)]),
            SourcePlace::Disk { centre, axis, .. } => (
                "beam",
                vec![Argument::Vector(*centre), Argument::Vector(*axis)],
            ),
            SourcePlace::Wall { name } => ("wall", vec![Argument::Text(name.clone())]),
            SourcePlace::Walls => ("walls", Vec::new()),
            _ => ("volume", Vec::new()),
        };
        let mut options = Vec::new();
        if let SourcePlace::Disk { radius, .. } = source.place()
            && *radius != 0.0
        {
            options.push(("radius", Argument::Number(*radius)));
        }
        match (source.spread(), name) {
            (Spread::Cosine { half_angle, .. }, "beam") if half_angle != 0.0 => {
                options.push(("divergence", Argument::Number(half_angle)));
            }
            (
                Spread::Cosine {
                    axis: Some(axis), ..
                },
                "point",
            )
            | (Spread::Parallel { axis }, _) => {
                options.push(("axis", Argument::Vector(axis)));
            }
            (Spread::Cosine { half_angle, .. }, "wall" | "walls") if half_angle != HEMISPHERE => {
                options.push(("cone", Argument::Number(half_angle)));
            }
            _ => {}
        }
        if source.watts() != 1.0 {
            options.push(("flux", Argument::Number(source.watts())));
        }
        Call {
            name,
            data,
            options,
        }
    }

    fn from_walls(
        source: albedra::Source,
        cone: Option<f64>,
        axis: Option<&Bound<'_, PyAny>>,
        flux: f64,
    ) -> PyResult<Self> {
        let source = match (cone, axis) {
            (None, None) => source,
            (Some(half_angle), None) => source.cone(half_angle),
            (None, Some(axis)) => source.parallel(DVec3::from_array(vector("axis", axis)?)),
            (Some(_), Some(_)) => {
                return Err(PyValueError::new_err(
                    "either a cone or an axis can be given, got both: light along an axis is parallel",
                ));
            }
        };
        Ok(Self(source.flux(flux)))
    }
}

#[pymethods]
impl Source {
    /// Light from a point, in all directions alike.
    ///
    /// Parameters
    /// ----------
    /// position : (3,) array_like
    ///     Position in m.
    /// axis : (3,) array_like, optional
    ///     Makes it emit by the cosine law about this direction, into that half of space only.
    /// flux : float
    ///     Radiant flux in W (energy of a pulse in J).
    #[staticmethod]
    #[pyo3(signature = (position, *, axis = None, flux = 1.0))]
    fn point(
        position: &Bound<'_, PyAny>,
        axis: Option<&Bound<'_, PyAny>>,
        flux: f64,
    ) -> PyResult<Self> {
        let source = albedra::Source::point(vector::<3>("position", position)?);
        let source = match axis {
            Some(axis) => source.cosine_about(vector::<3>("axis", axis)?),
            None => source,
        };
        Ok(Self(source.flux(flux)))
    }

    /// A beam of light.
    ///
    /// Parameters
    /// ----------
    /// position : (3,) array_like
    ///     Centre of the disk that it starts from, in m.
    /// direction : (3,) array_like
    ///     Direction, of any length.
    /// radius : float
    ///     Radius of the disk in m; photons start uniformly on it.
    /// divergence : float
    ///     Half-angle in rad of the cone of uniform radiance that they fill.
    /// flux : float
    ///     Radiant flux in W (energy of a pulse in J).
    #[staticmethod]
    #[pyo3(signature = (position, direction, *, radius = 0.0, divergence = 0.0, flux = 1.0))]
    fn beam(
        position: &Bound<'_, PyAny>,
        direction: &Bound<'_, PyAny>,
        radius: f64,
        divergence: f64,
        flux: f64,
    ) -> PyResult<Self> {
        let position = vector::<3>("position", position)?;
        let source = albedra::Source::beam(position, vector::<3>("direction", direction)?);
        Ok(Self(
            source.radius(radius).divergence(divergence).flux(flux),
        ))
    }

    /// Light from a wall, a region or an opening, uniform over its visible area and Lambertian.
    ///
    /// Parameters
    /// ----------
    /// name : str
    ///     The wall, region or opening.
    /// cone : float, optional
    ///     Half-angle in rad about the normal beyond which nothing is emitted.
    /// axis : (3,) array_like, optional
    ///     Makes the light parallel to this direction.
    /// flux : float
    ///     Radiant flux in W (energy of a pulse in J).
    #[staticmethod]
    #[pyo3(signature = (name, *, cone = None, axis = None, flux = 1.0))]
    fn wall(
        name: &str,
        cone: Option<f64>,
        axis: Option<&Bound<'_, PyAny>>,
        flux: f64,
    ) -> PyResult<Self> {
        Self::from_walls(albedra::Source::wall(name), cone, axis, flux)
    }

    /// Light from all walls, regions and openings by area, Lambertian.
    ///
    /// Parameters
    /// ----------
    /// cone : float, optional
    ///     Half-angle in rad about the normals beyond which nothing is emitted.
    /// axis : (3,) array_like, optional
    ///     Makes the light parallel to this direction.
    /// flux : float
    ///     Radiant flux in W (energy of a pulse in J).
    #[staticmethod]
    #[pyo3(signature = (*, cone = None, axis = None, flux = 1.0))]
    fn walls(cone: Option<f64>, axis: Option<&Bound<'_, PyAny>>, flux: f64) -> PyResult<Self> {
        Self::from_walls(albedra::Source::walls(), cone, axis, flux)
    }

    /// Light that fills the volume uniformly and runs in all directions.
    ///
    /// Parameters
    /// ----------
    /// flux : float
    ///     Radiant flux in W (energy of a pulse in J).
    #[staticmethod]
    #[pyo3(signature = (*, flux = 1.0))]
    fn volume(flux: f64) -> Self {
        Self(albedra::Source::volume().flux(flux))
    }

    /// Radiant flux in W (energy of a pulse in J).
    #[getter]
    fn flux(&self) -> f64 {
        self.0.watts()
    }

    #[staticmethod]
    fn _rebuild<'py>(
        name: &Bound<'py, PyString>,
        data: &Bound<'py, PyTuple>,
        options: &Bound<'py, PyDict>,
    ) -> PyResult<Bound<'py, PyAny>> {
        name.py()
            .get_type::<Self>()
            .call_method(name, data, Some(options))
    }

    fn __reduce__<'py>(&self, py: Python<'py>) -> PyResult<Bound<'py, PyAny>> {
        let call = self.call();
        let data: Vec<_> = call
            .data
            .iter()
            .map(|a| a.to_python(py))
            .collect::<PyResult<_>>()?;
        let options = PyDict::new(py);
        for (name, value) in &call.options {
            options.set_item(name, value.to_python(py)?)?;
        }
        let rebuild = py.get_type::<Self>().getattr("_rebuild")?;
        let arguments = (call.name, PyTuple::new(py, data)?, options);
        Ok((rebuild, arguments).into_pyobject(py)?.into_any())
    }

    fn __repr__(&self, py: Python<'_>) -> PyResult<String> {
        let call = self.call();
        let mut arguments = Vec::new();
        for value in &call.data {
            arguments.push(value.written(py)?);
        }
        for (name, value) in &call.options {
            arguments.push(format!("{name}={}", value.written(py)?));
        }
        let full = format!("Source.{}({})", call.name, arguments.join(", "));
        Ok(fitting(full, || {
            let from = arguments.first().map_or("", String::as_str);
            format!("<Source: {} {from}, {} W>", call.name, self.0.watts())
        }))
    }
}
