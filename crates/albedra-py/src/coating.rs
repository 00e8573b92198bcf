//! What walls do to light.

use pyo3::prelude::*;
use pyo3::types::PyType;

use crate::errors::raise;
use crate::text::number;

/// What a wall does to light: how much it reflects, and how.
///
/// The reflectance is directional–hemispherical and the same at all angles. What is reflected leaves by the
/// cosine law (Lambertian), as from a mirror (regular), or shared between the two (mixed reflection,
/// CIE S 017).
///
/// Examples
/// --------
/// >>> import albedra as al
/// >>> al.Coating.lambertian(0.97)
/// Coating.lambertian(0.97)
/// >>> al.Coating.mixed(0.90, specular_share=0.3).specular_share
/// 0.3
#[pyclass(frozen, eq, from_py_object, module = "albedra")]
#[derive(Clone, PartialEq)]
pub(crate) struct Coating(pub(crate) albedra::Coating);

#[pymethods]
impl Coating {
    /// Reflects by the cosine law.
    ///
    /// Parameters
    /// ----------
    /// reflectance : float
    ///     Share of the light that is reflected, in [0, 1].
    #[staticmethod]
    fn lambertian(reflectance: f64) -> PyResult<Self> {
        albedra::Coating::lambertian(reflectance)
            .map(Self)
            .map_err(raise)
    }

    /// Reflects as a mirror.
    ///
    /// Parameters
    /// ----------
    /// reflectance : float
    ///     Share of the light that is reflected, in [0, 1].
    #[staticmethod]
    fn mirror(reflectance: f64) -> PyResult<Self> {
        albedra::Coating::mirror(reflectance)
            .map(Self)
            .map_err(raise)
    }

    /// Reflects a share of the reflected light as a mirror and the rest by the cosine law.
    ///
    /// Parameters
    /// ----------
    /// reflectance : float
    ///     Share of the light that is reflected, in [0, 1].
    /// specular_share : float
    ///     Share of the reflected light that leaves as from a mirror, in [0, 1].
    #[staticmethod]
    #[pyo3(signature = (reflectance, *, specular_share))]
    fn mixed(reflectance: f64, specular_share: f64) -> PyResult<Self> {
        albedra::Coating::mixed(reflectance, specular_share)
            .map(Self)
            .map_err(raise)
    }

    /// Reflects nothing.
    #[staticmethod]
    fn absorber() -> Self {
        Self(albedra::Coating::absorber())
    }

    /// Directional–hemispherical reflectance, the same at all angles.
    #[getter]
    fn reflectance(&self) -> f64 {
        self.0.reflectance()
    }

    /// Share of the reflected light that leaves as from a mirror.
    #[getter]
    fn specular_share(&self) -> f64 {
        self.0.specular_share()
    }

    #[classmethod]
    fn _rebuild(_: &Bound<'_, PyType>, reflectance: f64, specular_share: f64) -> PyResult<Self> {
        Self::mixed(reflectance, specular_share)
    }

    fn __reduce__(&self, py: Python<'_>) -> PyResult<(Py<PyAny>, (f64, f64))> {
        let rebuild = py.get_type::<Self>().getattr("_rebuild")?.unbind();
        Ok((rebuild, (self.0.reflectance(), self.0.specular_share())))
    }

    fn __repr__(&self) -> String {
        let reflectance = number(self.0.reflectance());
        match (self.0.reflectance(), self.0.specular_share()) {
            (0.0, 0.0) => "Coating.absorber()".to_owned(),
            (_, 0.0) => format!("Coating.lambertian({reflectance})"),
            (_, 1.0) => format!("Coating.mirror({reflectance})"),
            (_, share) => {
                format!(
                    "Coating.mixed({reflectance}, specular_share={})",
                    number(share)
                )
            }
        }
    }
}
