//! What fills an enclosure.

use pyo3::prelude::*;

use crate::errors::raise;
use crate::text::number;

/// What fills an enclosure: a group index, which sets the speed, and a homogeneous absorption.
///
/// The group index, not the phase index, decides when light arrives.
///
/// Parameters
/// ----------
/// group_index : float
///     Speed of light in vacuum over that of a pulse in the medium, in [0.001, 1000].
/// absorption : float
///     Napierian absorption coefficient in m⁻¹.
///
/// Examples
/// --------
/// >>> import albedra as al
/// >>> gas = al.Medium(absorption=0.02)
/// >>> gas
/// Medium(1.0, 0.02)
/// >>> gas.speed
/// 299792458.0
#[pyclass(frozen, eq, from_py_object, module = "albedra")]
#[derive(Clone, PartialEq)]
pub(crate) struct Medium(pub(crate) albedra::Medium);

#[pymethods]
impl Medium {
    #[new]
    #[pyo3(signature = (group_index = 1.0, absorption = 0.0))]
    fn new(group_index: f64, absorption: f64) -> PyResult<Self> {
        albedra::Medium::new(group_index, absorption)
            .map(Self)
            .map_err(raise)
    }

    /// Group index.
    #[getter]
    fn group_index(&self) -> f64 {
        self.0.group_index()
    }

    /// Napierian absorption coefficient in m⁻¹.
    #[getter]
    fn absorption(&self) -> f64 {
        self.0.absorption()
    }

    /// Speed of a pulse in m/s.
    #[getter]
    fn speed(&self) -> f64 {
        self.0.speed()
    }

    fn __getnewargs__(&self) -> (f64, f64) {
        (self.0.group_index(), self.0.absorption())
    }

    fn __repr__(&self) -> String {
        format!(
            "Medium({}, {})",
            number(self.0.group_index()),
            number(self.0.absorption())
        )
    }
}
