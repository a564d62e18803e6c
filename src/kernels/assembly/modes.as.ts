// Sum of random Fourier modes on one block of at most 64 points, four points to a vector.
//
//   A(x) = sum_n w_n(x) b_n cos(K_n.x + phi_n)
//   u(x) = curl A = sum_n [ w_n a_n sin(K_n.x + phi_n) + grad w_n x b_n cos(K_n.x + phi_n) ]
//   w_n  = W_s(x) exp(a_n . L(x) a_n) g(t2),  t2 = K_n . H(x) K_n (scaled so that t2 = 1 at the shortest seeded wave)
//   g    = v^2 (3 - 2 v),  v = clamp((1 - t2) taper, 0, 1)
//
// Phases are counted in turns: the products run in 64 bits, the rest after the nearest whole turn is taken off in 32.

/** Points in a block. */
const P: usize = 64;
const F: usize = P * 4;
const D: usize = P * 8;
const ROWS: usize = 3 * D;
/** Bytes of one mode in the table of 64-bit and 32-bit constants. */
const M64: usize = 32;
const M32: usize = 96;

// Rows of 32-bit numbers in the block, in units of F after the positions.
const rW: usize = 0;
const rGW: usize = 1;
const rA: usize = 4;
const rU: usize = 7;
const rH: usize = 10;
const rL: usize = 16;
const rDH: usize = 22;
const rDL: usize = 40;
const rE: usize = 58;
const rR: usize = 59;
const rM: usize = 60;
const rP: usize = 66;
const rQ: usize = 67;
const rT: usize = 70;
const rowCount: usize = 76;

const block: usize = memory.data(<i32>(3 * 64 * 8 + 76 * 64 * 4), 16);

export function blockAddress(): usize {
  return block;
}

export function freeAddress(): usize {
  return (__heap_base + 63) & ~63;
}

/** Sets rows [first, first + count) to zero. */
export function clear(first: usize, count: usize): void {
  memory.fill(block + ROWS + first * F, 0, count * F);
}

// @ts-ignore: decorator
@inline
function row(r: usize, o: usize): v128 {
  return v128.load(block + ROWS + r * F + o);
}

// @ts-ignore: decorator
@inline
function put(r: usize, o: usize, v: v128): void {
  v128.store(block + ROWS + r * F + o, v);
}

// @ts-ignore: decorator
@inline
function sp(m: usize, i: usize): v128 {
  return v128.load_splat<f32>(m + i * 4);
}

// @ts-ignore: decorator
@inline
function mul(a: v128, b: v128): v128 {
  return f32x4.mul(a, b);
}

// @ts-ignore: decorator
@inline
function add(a: v128, b: v128): v128 {
  return f32x4.add(a, b);
}

// @ts-ignore: decorator
@inline
function sub(a: v128, b: v128): v128 {
  return f32x4.sub(a, b);
}

// @ts-ignore: decorator
@inline
function cst(x: f32): v128 {
  return f32x4.splat(x);
}

/** Phase in turns less the nearest whole number, four points. */
// @ts-ignore: decorator
@inline
function turns(q: usize, o: usize): v128 {
  const kx = v128.load_splat<f64>(q);
  const ky = v128.load_splat<f64>(q + 8);
  const kz = v128.load_splat<f64>(q + 16);
  const ph = v128.load_splat<f64>(q + 24);
  const p = block + o * 2;
  let t0 = f64x2.add(
    f64x2.add(f64x2.mul(v128.load(p), kx), f64x2.mul(v128.load(p + D), ky)),
    f64x2.add(f64x2.mul(v128.load(p + 2 * D), kz), ph),
  );
  let t1 = f64x2.add(
    f64x2.add(f64x2.mul(v128.load(p + 16), kx), f64x2.mul(v128.load(p + D + 16), ky)),
    f64x2.add(f64x2.mul(v128.load(p + 2 * D + 16), kz), ph),
  );
  t0 = f64x2.sub(t0, f64x2.nearest(t0));
  t1 = f64x2.sub(t1, f64x2.nearest(t1));
  return v128.shuffle<f32>(f32x4.demote_f64x2_zero(t0), f32x4.demote_f64x2_zero(t1), 0, 1, 4, 5);
}

/** sin(2 pi r), |r| <= 1/2, minimax odd polynomial (error 1e-7). */
// @ts-ignore: decorator
@inline
function sine(r: v128, y: v128): v128 {
  let p = add(mul(cst(-12.271260714137558), y), cst(41.20539387096409));
  p = add(mul(p, y), cst(-76.580100310554));
  p = add(mul(p, y), cst(81.59618385312436));
  p = add(mul(p, y), cst(-41.34142139796329));
  p = add(mul(p, y), cst(6.283182818544019));
  return mul(p, r);
}

/** cos(2 pi r), |r| <= 1/2, y = r^2, minimax even polynomial (error 8e-7). */
// @ts-ignore: decorator
@inline
function cosine(y: v128): v128 {
  let p = add(mul(cst(-21.07678244574806), y), cst(58.79403942402615));
  p = add(mul(p, y), cst(-85.27239730778355));
  p = add(mul(p, y), cst(64.92872666474197));
  p = add(mul(p, y), cst(-19.738982519021288));
  return add(mul(p, y), cst(0.9999992216115278));
}

/** exp(x) by 2^n 2^f, minimax polynomial for 2^f on |f| <= 1/2 (relative error 1e-7). */
// @ts-ignore: decorator
@inline
function exponential(x: v128): v128 {
  const t = f32x4.max(f32x4.min(mul(x, cst(1.4426950408889634)), cst(60)), cst(-60));
  const n = f32x4.nearest(t);
  const f = sub(t, n);
  let p = add(mul(cst(0.0013276472082081263), f), cst(0.009675541526380742));
  p = add(mul(p, f), cst(0.055507132748913265));
  p = add(mul(p, f), cst(0.24022119720308893));
  p = add(mul(p, f), cst(0.6931469670628643));
  p = add(mul(p, f), cst(1.000000071655392));
  return mul(p, i32x4.shl(i32x4.add(i32x4.trunc_sat_f32x4_s(n), i32x4.splat(127)), 23));
}

/** v . T v for a row group holding XX XY XZ YY YZ ZZ, with the products of v (off-diagonal ones doubled) at m. */
// @ts-ignore: decorator
@inline
function form(r: usize, o: usize, m: usize, i: usize): v128 {
  return add(
    add(add(mul(sp(m, i), row(r, o)), mul(sp(m, i + 1), row(r + 1, o))), mul(sp(m, i + 2), row(r + 2, o))),
    add(add(mul(sp(m, i + 3), row(r + 3, o)), mul(sp(m, i + 4), row(r + 4, o))), mul(sp(m, i + 5), row(r + 5, o))),
  );
}

/**
 * Adds one shell to A and u where the weight is the same for all its modes.
 *
 * @param groups  groups of four points
 * @param q       address of the 64-bit constants of the shell's first mode: K / 2 pi, phase / 2 pi
 * @param m       address of its 32-bit constants: a, b, K K, a a
 */
export function plainShell(groups: i32, q: usize, m: usize, modes: i32): void {
  for (let g = 0; g < groups; g++) {
    const o = <usize>g * 16;
    let sx = cst(0);
    let sy = cst(0);
    let sz = cst(0);
    let cx = cst(0);
    let cy = cst(0);
    let cz = cst(0);
    let qq = q;
    let mm = m;
    for (let n = 0; n < modes; n++) {
      const r = turns(qq, o);
      const y = mul(r, r);
      const s = sine(r, y);
      const c = cosine(y);
      sx = add(sx, mul(sp(mm, 0), s));
      sy = add(sy, mul(sp(mm, 1), s));
      sz = add(sz, mul(sp(mm, 2), s));
      cx = add(cx, mul(sp(mm, 3), c));
      cy = add(cy, mul(sp(mm, 4), c));
      cz = add(cz, mul(sp(mm, 5), c));
      qq += M64;
      mm += M32;
    }
    finish(o, sx, sy, sz, cx, cy, cz);
  }
}

/** A += W C, u += W S + grad W x C. */
// @ts-ignore: decorator
@inline
function finish(o: usize, sx: v128, sy: v128, sz: v128, cx: v128, cy: v128, cz: v128): void {
  const w = row(rW, o);
  const gx = row(rGW, o);
  const gy = row(rGW + 1, o);
  const gz = row(rGW + 2, o);
  put(rA, o, add(row(rA, o), mul(w, cx)));
  put(rA + 1, o, add(row(rA + 1, o), mul(w, cy)));
  put(rA + 2, o, add(row(rA + 2, o), mul(w, cz)));
  put(rU, o, add(row(rU, o), add(mul(w, sx), sub(mul(gy, cz), mul(gz, cy)))));
  put(rU + 1, o, add(row(rU + 1, o), add(mul(w, sy), sub(mul(gz, cx), mul(gx, cz)))));
  put(rU + 2, o, add(row(rU + 2, o), add(mul(w, sz), sub(mul(gx, cy), mul(gy, cx)))));
}

/**
 * Adds one shell whose weight differs from mode to mode.
 *
 * @param flags  1: cut-off by the cell's width along the wave; 2: polarisation weights; 4: gradients of either
 */
export function shapedShell(groups: i32, q: usize, m: usize, modes: i32, flags: i32, taper: f32): void {
  const cut = (flags & 1) != 0;
  const stress = (flags & 2) != 0;
  const slopes = (flags & 4) != 0;
  const one = cst(1);
  const zero = cst(0);
  const steep = cst(taper);
  for (let g = 0; g < groups; g++) {
    const o = <usize>g * 16;
    let sx = zero;
    let sy = zero;
    let sz = zero;
    let cx = zero;
    let cy = zero;
    let cz = zero;
    // Sum of (grad of the mode's own factor) x b cos, still without W.
    let hx = zero;
    let hy = zero;
    let hz = zero;
    let qq = q;
    let mm = m;
    for (let n = 0; n < modes; n++, qq += M64, mm += M32) {
      let factor = one;
      let slope = zero;
      if (cut) {
        const t2 = form(rH, o, mm, 6);
        if (!v128.any_true(f32x4.lt(t2, one))) continue;
        const v = f32x4.max(f32x4.min(mul(sub(one, t2), steep), one), zero);
        factor = mul(mul(v, v), sub(cst(3), add(v, v)));
        slope = mul(mul(cst(-6), mul(v, sub(one, v))), steep);
      }
      let polar = one;
      if (stress) {
        polar = exponential(form(rL, o, mm, 12));
      }
      const r = turns(qq, o);
      const y = mul(r, r);
      const weight = mul(factor, polar);
      const c = cosine(y);
      const s = mul(sine(r, y), weight);
      const bx = sp(mm, 3);
      const by = sp(mm, 4);
      const bz = sp(mm, 5);
      const wc = mul(c, weight);
      sx = add(sx, mul(sp(mm, 0), s));
      sy = add(sy, mul(sp(mm, 1), s));
      sz = add(sz, mul(sp(mm, 2), s));
      cx = add(cx, mul(bx, wc));
      cy = add(cy, mul(by, wc));
      cz = add(cz, mul(bz, wc));
      if (slopes) {
        let dx = zero;
        let dy = zero;
        let dz = zero;
        if (stress) {
          dx = mul(wc, form(rDL, o, mm, 12));
          dy = mul(wc, form(rDL + 6, o, mm, 12));
          dz = mul(wc, form(rDL + 12, o, mm, 12));
        }
        if (cut && v128.any_true(f32x4.lt(slope, zero))) {
          const sc = mul(mul(slope, polar), c);
          dx = add(dx, mul(sc, form(rDH, o, mm, 6)));
          dy = add(dy, mul(sc, form(rDH + 6, o, mm, 6)));
          dz = add(dz, mul(sc, form(rDH + 12, o, mm, 6)));
        }
        hx = add(hx, sub(mul(dy, bz), mul(dz, by)));
        hy = add(hy, sub(mul(dz, bx), mul(dx, bz)));
        hz = add(hz, sub(mul(dx, by), mul(dy, bx)));
      }
    }
    finish(o, add(sx, hx), add(sy, hy), add(sz, hz), cx, cy, cz);
  }
}

/**
 * Adds one shell to the moments: seeded energy, resolvable energy, second moments of the seeded velocity.
 * The row W holds the energy of one mode of the shell.
 *
 * @param ratio  (shortest resolvable wave / shortest seeded wave)^2
 */
export function moments(groups: i32, m: usize, modes: i32, flags: i32, taper: f32, ratio: f32): void {
  const cut = (flags & 1) != 0;
  const stress = (flags & 2) != 0;
  const one = cst(1);
  const zero = cst(0);
  const steep = cst(taper);
  for (let g = 0; g < groups; g++) {
    const o = <usize>g * 16;
    let e = zero;
    let resolvable = zero;
    let xx = zero;
    let xy = zero;
    let xz = zero;
    let yy = zero;
    let yz = zero;
    let zz = zero;
    let mm = m;
    for (let n = 0; n < modes; n++, mm += M32) {
      const ax = sp(mm, 0);
      const ay = sp(mm, 1);
      const az = sp(mm, 2);
      let w = one;
      if (stress) {
        const polar = exponential(form(rL, o, mm, 12));
        w = mul(polar, polar);
      }
      const a2 = add(add(mul(ax, ax), mul(ay, ay)), mul(az, az));
      if (cut) {
        const t2 = form(rH, o, mm, 6);
        const r = f32x4.max(f32x4.min(add(mul(sub(one, mul(t2, cst(ratio))), steep), cst(0.5)), one), zero);
        resolvable = add(resolvable, mul(mul(w, a2), mul(mul(r, r), sub(cst(3), add(r, r)))));
        const v = f32x4.max(f32x4.min(mul(sub(one, t2), steep), one), zero);
        const factor = mul(mul(v, v), sub(cst(3), add(v, v)));
        w = mul(w, mul(factor, factor));
      } else {
        resolvable = add(resolvable, mul(w, a2));
      }
      e = add(e, mul(w, a2));
      if (stress) {
        const wx = mul(w, ax);
        const wy = mul(w, ay);
        xx = add(xx, mul(wx, ax));
        xy = add(xy, mul(wx, ay));
        xz = add(xz, mul(wx, az));
        yy = add(yy, mul(wy, ay));
        yz = add(yz, mul(wy, az));
        zz = add(zz, mul(mul(w, az), az));
      }
    }
    const w = row(rW, o);
    put(rE, o, add(row(rE, o), mul(w, e)));
    put(rR, o, add(row(rR, o), mul(w, resolvable)));
    if (stress) {
      put(rM, o, add(row(rM, o), mul(w, xx)));
      put(rM + 1, o, add(row(rM + 1, o), mul(w, xy)));
      put(rM + 2, o, add(row(rM + 2, o), mul(w, xz)));
      put(rM + 3, o, add(row(rM + 3, o), mul(w, yy)));
      put(rM + 4, o, add(row(rM + 4, o), mul(w, yz)));
      put(rM + 5, o, add(row(rM + 5, o), mul(w, zz)));
    }
  }
}

/**
 * Adds one shell to the expected energy of curl(c A) as a function of grad ln c:
 * energy = c^2 (P + Q.grad ln c + grad ln c . T grad ln c). Rows W and grad W as for the velocity.
 */
export function expected(groups: i32, m: usize, modes: i32, flags: i32, taper: f32): void {
  const cut = (flags & 1) != 0;
  const stress = (flags & 2) != 0;
  const one = cst(1);
  const zero = cst(0);
  const steep = cst(taper);
  const quarter = cst(0.25);
  for (let g = 0; g < groups; g++) {
    const o = <usize>g * 16;
    const w0 = row(rW, o);
    const gx = row(rGW, o);
    const gy = row(rGW + 1, o);
    const gz = row(rGW + 2, o);
    let p = zero;
    let qx = zero;
    let qy = zero;
    let qz = zero;
    let xx = zero;
    let xy = zero;
    let xz = zero;
    let yy = zero;
    let yz = zero;
    let zz = zero;
    let mm = m;
    for (let n = 0; n < modes; n++, mm += M32) {
      let factor = one;
      let slope = zero;
      let polar = one;
      if (cut) {
        const t2 = form(rH, o, mm, 6);
        if (!v128.any_true(f32x4.lt(t2, one))) continue;
        const v = f32x4.max(f32x4.min(mul(sub(one, t2), steep), one), zero);
        factor = mul(mul(v, v), sub(cst(3), add(v, v)));
        slope = mul(mul(cst(-6), mul(v, sub(one, v))), steep);
      }
      if (stress) polar = exponential(form(rL, o, mm, 12));
      const f = mul(factor, polar);
      const w = mul(w0, f);
      let dx = mul(gx, f);
      let dy = mul(gy, f);
      let dz = mul(gz, f);
      if (stress) {
        dx = add(dx, mul(w, form(rDL, o, mm, 12)));
        dy = add(dy, mul(w, form(rDL + 6, o, mm, 12)));
        dz = add(dz, mul(w, form(rDL + 12, o, mm, 12)));
      }
      if (cut) {
        const sw = mul(mul(slope, polar), w0);
        dx = add(dx, mul(sw, form(rDH, o, mm, 6)));
        dy = add(dy, mul(sw, form(rDH + 6, o, mm, 6)));
        dz = add(dz, mul(sw, form(rDH + 12, o, mm, 6)));
      }
      const ax = sp(mm, 0);
      const ay = sp(mm, 1);
      const az = sp(mm, 2);
      const bx = sp(mm, 3);
      const by = sp(mm, 4);
      const bz = sp(mm, 5);
      const b2 = add(add(mul(bx, bx), mul(by, by)), mul(bz, bz));
      const a2 = add(add(mul(ax, ax), mul(ay, ay)), mul(az, az));
      const vx = sub(mul(dy, bz), mul(dz, by));
      const vy = sub(mul(dz, bx), mul(dx, bz));
      const vz = sub(mul(dx, by), mul(dy, bx));
      const w2 = mul(mul(w, w), quarter);
      p = add(p, add(mul(w2, a2), mul(quarter, add(add(mul(vx, vx), mul(vy, vy)), mul(vz, vz)))));
      const db = add(add(mul(dx, bx), mul(dy, by)), mul(dz, bz));
      const hw = mul(w, cst(0.5));
      qx = add(qx, mul(hw, sub(mul(dx, b2), mul(bx, db))));
      qy = add(qy, mul(hw, sub(mul(dy, b2), mul(by, db))));
      qz = add(qz, mul(hw, sub(mul(dz, b2), mul(bz, db))));
      xx = add(xx, mul(w2, sub(b2, mul(bx, bx))));
      xy = sub(xy, mul(w2, mul(bx, by)));
      xz = sub(xz, mul(w2, mul(bx, bz)));
      yy = add(yy, mul(w2, sub(b2, mul(by, by))));
      yz = sub(yz, mul(w2, mul(by, bz)));
      zz = add(zz, mul(w2, sub(b2, mul(bz, bz))));
    }
    put(rP, o, add(row(rP, o), p));
    put(rQ, o, add(row(rQ, o), qx));
    put(rQ + 1, o, add(row(rQ + 1, o), qy));
    put(rQ + 2, o, add(row(rQ + 2, o), qz));
    put(rT, o, add(row(rT, o), xx));
    put(rT + 1, o, add(row(rT + 1, o), xy));
    put(rT + 2, o, add(row(rT + 2, o), xz));
    put(rT + 3, o, add(row(rT + 3, o), yy));
    put(rT + 4, o, add(row(rT + 4, o), yz));
    put(rT + 5, o, add(row(rT + 5, o), zz));
  }
}
