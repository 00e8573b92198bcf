//! Meshes as bytes, to be kept beside a text.

use glam::DVec3;

use super::Mesh;

impl Mesh {
    /// The mesh as bytes: counts, positions, indices and names, little-endian.
    pub fn to_bytes(&self) -> Vec<u8> {
        let counts = [
            self.vertices.len(),
            self.corners.len(),
            self.facet_walls.len(),
            self.walls.len(),
        ];
        let mut bytes: Vec<u8> = counts
            .iter()
            .flat_map(|&count| (count as u64).to_le_bytes())
            .collect();
        bytes.extend(
            self.vertices
                .iter()
                .flat_map(|v| [v.x, v.y, v.z])
                .flat_map(f64::to_le_bytes),
        );
        for list in [&self.corners, &self.starts, &self.facet_walls] {
            bytes.extend(list.iter().flat_map(|index| index.to_le_bytes()));
        }
        for name in &self.walls {
            bytes.extend((name.len() as u64).to_le_bytes());
            bytes.extend(name.as_bytes());
        }
        bytes
    }

    /// Reads a mesh from its bytes; nothing, if they are not those of a mesh. Indices are left to the audit.
    pub fn from_bytes(bytes: &[u8]) -> Option<Self> {
        let mut reader = Reader(bytes);
        let [vertices, corners, facets, walls] = [
            reader.count()?,
            reader.count()?,
            reader.count()?,
            reader.count()?,
        ];
        let coordinates = reader.many(vertices.checked_mul(3)?, f64::from_le_bytes)?;
        let vertices = coordinates.chunks_exact(3).map(DVec3::from_slice).collect();
        let corners = reader.many(corners, u32::from_le_bytes)?;
        let starts: Vec<u32> = if facets == 0 {
            Vec::new()
        } else {
            reader.many(facets + 1, u32::from_le_bytes)?
        };
        let rising = starts.windows(2).all(|pair| pair[0] <= pair[1]);
        if !rising
            || starts
                .last()
                .is_some_and(|&last| last as usize > corners.len())
        {
            return None;
        }
        let facet_walls = reader.many(facets, u32::from_le_bytes)?;
        let mut names = Vec::new();
        for _ in 0..walls {
            let length = reader.count()?;
            names.push(std::str::from_utf8(reader.take(length)?).ok()?.to_owned());
        }
        reader.0.is_empty().then_some(Self {
            vertices,
            corners,
            starts,
            facet_walls,
            walls: names,
        })
    }
}

struct Reader<'a>(&'a [u8]);

impl<'a> Reader<'a> {
    fn take(&mut self, length: usize) -> Option<&'a [u8]> {
        let (part, rest) = self.0.split_at_checked(length)?;
        self.0 = rest;
        Some(part)
    }

    fn count(&mut self) -> Option<usize> {
        let bytes = self.take(8)?.try_into().ok()?;
        usize::try_from(u64::from_le_bytes(bytes)).ok()
    }

    fn many<T, const N: usize>(
        &mut self,
        count: usize,
        read: impl Fn([u8; N]) -> T,
    ) -> Option<Vec<T>> {
        let bytes = self.take(count.checked_mul(N)?)?;
        bytes
            .chunks_exact(N)
            .map(|chunk| chunk.try_into().ok().map(&read))
            .collect()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn bytes_give_the_mesh_back_and_nothing_when_damaged() {
        let mesh = super::super::prism(7, 0.3, 0.9).expect("valid");
        let bytes = mesh.to_bytes();
        assert_eq!(Mesh::from_bytes(&bytes), Some(mesh));
        for length in 0..bytes.len() {
            assert_eq!(Mesh::from_bytes(&bytes[..length]), None);
        }
        let mut long = bytes.clone();
        long.push(0);
        assert_eq!(Mesh::from_bytes(&long), None);
        let mut lying = bytes;
        lying[7] = 0xFF;
        assert_eq!(Mesh::from_bytes(&lying), None);
    }
}
