// Turning and projecting the node cloud: plain arithmetic on plain arrays, without a screen.

/// Azimuth and elevation in radians, z up: unit vectors to the right, up, and towards the eye.
export function view_axes(azimuth, elevation) {
  const ca = Math.cos(azimuth), sa = Math.sin(azimuth), ce = Math.cos(elevation), se = Math.sin(elevation);
  return { right: [-sa, ca, 0], up: [-se * ca, -se * sa, ce], toward: [ce * ca, ce * sa, se] };
}

function eigenvector(sums) {
  // Of the smallest eigenvalue, by Jacobi rotations of a 3 x 3 matrix.
  const a = sums.map((row) => [...row]);
  const v = [[1, 0, 0], [0, 1, 0], [0, 0, 1]];
  for (let sweep = 0; sweep < 20; sweep += 1) {
    for (const [p, q] of [[0, 1], [0, 2], [1, 2]]) {
      if (Math.abs(a[p][q]) < 1e-15) continue;
      const theta = (a[q][q] - a[p][p]) / (2 * a[p][q]);
      const t = (theta >= 0 ? 1 : -1) / (Math.abs(theta) + Math.hypot(theta, 1));
      const c = 1 / Math.hypot(t, 1), s = t * c;
      for (let k = 0; k < 3; k += 1) [a[k][p], a[k][q]] = [c * a[k][p] - s * a[k][q], s * a[k][p] + c * a[k][q]];
      for (let k = 0; k < 3; k += 1) [a[p][k], a[q][k]] = [c * a[p][k] - s * a[q][k], s * a[p][k] + c * a[q][k]];
      for (let k = 0; k < 3; k += 1) [v[k][p], v[k][q]] = [c * v[k][p] - s * v[k][q], s * v[k][p] + c * v[k][q]];
    }
  }
  const least = [0, 1, 2].reduce((best, k) => (a[k][k] < a[best][best] ? k : best), 0);
  return [v[0][least], v[1][least], v[2][least]];
}

/// The direction in which the cloud and the motion lose least, a little aside so that depth shows.
export function best_angles(place, moved) {
  const sums = [[0, 0, 0], [0, 0, 0], [0, 0, 0]];
  const gather = (list, weight) => {
    let total = 0;
    for (const number of list) total += number * number;
    if (!(total > 0)) return;
    for (let k = 0; k < list.length; k += 3) {
      for (let i = 0; i < 3; i += 1) for (let j = 0; j < 3; j += 1) sums[i][j] += weight * list[k + i] * list[k + j] / total;
    }
  };
  gather(place, 1);
  gather(moved ?? [], 1.5);
  let eye = eigenvector(sums);
  if (eye[2] < 0 || (eye[2] === 0 && eye[1] > 0)) eye = eye.map((c) => -c);
  const level = Math.hypot(eye[0], eye[1]);
  const azimuth = level > 1e-6 ? Math.atan2(eye[1], eye[0]) : -Math.PI / 2;
  const elevation = Math.min(1.25, Math.max(0.2, Math.atan2(eye[2], level)));
  return { azimuth: azimuth + 0.35, elevation };
}

/// Places as they stand when the motion has gone `amount` (-1 to 1) of its length, into `out`.
export function displace(place, motion, length, amount, out) {
  out.set(place);
  if (!motion) return out;
  for (let k = 0; k < motion.nodes.length; k += 1) {
    const at = 3 * motion.nodes[k];
    for (let d = 0; d < 3; d += 1) out[at + d] += length * amount * motion.moved[3 * k + d];
  }
  return out;
}

/// x, y in pixels and depth for every node, into `out`. camera: {azimuth, elevation, scale, x, y}
export function project(points, camera, width, height, out) {
  const { right, up, toward } = view_axes(camera.azimuth, camera.elevation);
  const cx = width / 2 + camera.x, cy = height / 2 + camera.y, s = camera.scale;
  for (let k = 0; k < points.length; k += 3) {
    const x = points[k], y = points[k + 1], z = points[k + 2];
    out[k] = cx + s * (x * right[0] + y * right[1]);
    out[k + 1] = cy - s * (x * up[0] + y * up[1] + z * up[2]);
    out[k + 2] = x * toward[0] + y * toward[1] + z * toward[2];
  }
  return out;
}

/// Pixels a unit so that everything is seen from these angles, and the shift that centres it.
export function fit(points, angles, width, height, margin) {
  const flat = project(points, { ...angles, scale: 1, x: 0, y: 0 }, 0, 0, new Float64Array(points.length));
  let low_x = Infinity, high_x = -Infinity, low_y = Infinity, high_y = -Infinity;
  for (let k = 0; k < flat.length; k += 3) {
    low_x = Math.min(low_x, flat[k]); high_x = Math.max(high_x, flat[k]);
    low_y = Math.min(low_y, flat[k + 1]); high_y = Math.max(high_y, flat[k + 1]);
  }
  if (!(high_x >= low_x)) return { scale: 1, x: 0, y: 0 };
  const scale = Math.min((width - 2 * margin) / Math.max(high_x - low_x, 1e-9), (height - 2 * margin) / Math.max(high_y - low_y, 1e-9));
  return { scale, x: -scale * (low_x + high_x) / 2, y: -scale * (low_y + high_y) / 2 };
}

/// Index of the node nearest to the pixel, within `reach` pixels; of several the one in front. -1 for none.
export function nearest(flat, x, y, reach) {
  let best = -1, distance = reach * reach;
  for (let k = 0; k < flat.length; k += 3) {
    const dx = flat[k] - x, dy = flat[k + 1] - y, d = dx * dx + dy * dy;
    if (d < distance - 1e-9 || (best >= 0 && Math.abs(d - distance) < 0.25 && flat[k + 2] > flat[3 * best + 2])) {
      distance = d;
      best = k / 3;
    }
  }
  return best;
}

/// Step 0 to 5 of `value` on a scale up to `top`.
export function step_of(value, top) {
  return Math.min(5, Math.max(0, Math.floor(6 * value / top)));
}
