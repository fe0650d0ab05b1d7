import { unsigned } from './leb128.ts';

/** First byte of every vector instruction. */
const vectorPrefix = 0xfd;

const plain: Readonly<Record<string, number>> = {
  'i32.load': 0x28, 'f64.load': 0x2b, 'i64.load32_u': 0x35, 'i32.store': 0x36, 'f64.store': 0x39,
  'i32.const': 0x41, 'i64.const': 0x42, 'f64.const': 0x44,
  'i32.eqz': 0x45, 'i32.eq': 0x46, 'i32.lt_s': 0x48, 'i32.gt_s': 0x4a, 'i32.ge_s': 0x4e,
  'f64.eq': 0x61, 'f64.ne': 0x62, 'f64.lt': 0x63, 'f64.gt': 0x64, 'f64.le': 0x65,
  'i32.add': 0x6a, 'i32.sub': 0x6b, 'i32.mul': 0x6c, 'i32.and': 0x71, 'i32.or': 0x72, 'i32.shl': 0x74,
  'i64.add': 0x7c, 'i64.sub': 0x7d, 'i64.mul': 0x7e, 'i64.and': 0x83, 'i64.or': 0x84,
  'i64.shl': 0x86, 'i64.shr_s': 0x87, 'i64.shr_u': 0x88,
  'f64.abs': 0x99, 'f64.neg': 0x9a, 'f64.ceil': 0x9b, 'f64.floor': 0x9c, 'f64.sqrt': 0x9f, 'f64.add': 0xa0, 'f64.sub': 0xa1, 'f64.mul': 0xa2, 'f64.div': 0xa3,
  'f64.min': 0xa4, 'f64.max': 0xa5, 'i32.wrap_i64': 0xa7, 'i64.trunc_f64_s': 0xb0, 'f64.convert_i64_s': 0xb9, 'i64.reinterpret_f64': 0xbd, 'f64.reinterpret_i64': 0xbf,
};

const wide: Readonly<Record<string, number>> = {
  'v128.load': 0x00, 'v128.load64_splat': 0x0a, 'v128.store': 0x0b, 'v128.const': 0x0c, 'i8x16.shuffle': 0x0d, 'i64x2.splat': 0x12, 'f64x2.splat': 0x14,
  'i32x4.extract_lane': 0x1b, 'i64x2.extract_lane': 0x1d, 'f64x2.extract_lane': 0x21, 'f64x2.replace_lane': 0x22,
  'f64x2.eq': 0x47, 'f64x2.ne': 0x48, 'f64x2.lt': 0x49, 'f64x2.gt': 0x4a, 'f64x2.le': 0x4b, 'f64x2.ge': 0x4c,
  'v128.and': 0x4e, 'v128.andnot': 0x4f, 'v128.or': 0x50, 'v128.xor': 0x51, 'v128.bitselect': 0x52, 'v128.any_true': 0x53,
  'v128.load64_zero': 0x5d, 'f64x2.promote_low_f32x4': 0x5f,
  'f64x2.floor': 0x75, 'f64x2.nearest': 0x94, 'i64x2.shl': 0xcb, 'i64x2.shr_u': 0xcd, 'i64x2.add': 0xce, 'i64x2.sub': 0xd1, 'i64x2.eq': 0xd6,
  'f64x2.abs': 0xec, 'f64x2.neg': 0xed, 'f64x2.sqrt': 0xef, 'f64x2.add': 0xf0, 'f64x2.sub': 0xf1, 'f64x2.mul': 0xf2, 'f64x2.div': 0xf3,
  'f64x2.min': 0xf4, 'f64x2.max': 0xf5, 'f64x2.pmin': 0xf6, 'f64x2.pmax': 0xf7, 'i32x4.trunc_sat_f64x2_s_zero': 0xfc,
};

/** The bytes of each instruction that is used here, by its name in the text format. */
export const instructions: Readonly<Record<string, readonly number[]>> = Object.fromEntries([
  ...Object.entries(plain).map(([name, code]) => [name, [code]] as const),
  ['i32.trunc_sat_f64_s', [0xfc, 0x02]] as const,
  ...Object.entries(wide).map(([name, code]) => [name, [vectorPrefix, ...unsigned(code)]] as const),
]);
