/**
 * Sections 5 (laws of depolarization), 6 (Faraday spectra, noise) and 10 (azimuthal patterns) of the
 * check values: every row, by its id there. Each was recomputed with numpy, scipy or sympy from the
 * publication named above it; formulas are quoted from memory but where they are said to be as printed.
 */
const rows = {
  // Burn 1966: sinc(R l2) e^{i R l2}; |P|/p0 and chi, rad (mod pi).
  '5.slab.R50.l2_0.01': [0.958851077208406, 0.25],
  '5.slab.R50.l2_0.0441': [0.36532598834909064, 1.1025],
  '5.slab.R20.l2_0.0441': [0.8752966426990793, 0.441],
  '5.slab.R100.l2_0.0441': [0.21646888246263413, 0.6342036732051034],
  '5.slab.R50.l2_0.06283': [2.437342533604521e-16, 1.6081226496766366e-16],
  // Burn 1966; Sokoloff et al. 1998: e^{-2 sigma^2 l4}.
  '5.ext.s10.l2_0.0441': [0.6777600244055619],
  '5.ext.s20.l2_0.0441': [0.21101036995659714],
  '5.ext.s50.l2_0.0441': [5.982720902924354e-05],
  '5.ext.s50.l2_0.01': [0.6065306597126334],
  // Burn 1966; Sokoloff et al. 1998: (1 - e^{-S})/S, sigma of the full path; |P|/p0 and chi, rad.
  '5.int.R0.s20.l2_0.0441': [0.5071122822045616, 0.0],
  '5.int.R50.s20.l2_0.0441': [0.23132291235767458, 0.7094671527490394],
  '5.int.R50.s20.l2_0.01': [0.9215124646296834, 0.24661013969211454],
  '5.int.R20.s10.l2_0.0441': [0.7259538755119719, 0.4109023100599318],
  '5.int.R50.s0.l2_0.0441': [0.36532598834909064, 1.1025],
  // Sokoloff et al. 1998 (multilayer slab); Shneider et al. 2014; Q, U and |P|.
  '5.two.l2_0': [0.32874263432695, 0.7025044547672938, 0.7756186102667442],
  '5.two.l2_0.01': [0.4420620719127933, 0.6695528783273973, 0.8023215890778049],
  '5.two.l2_0.0441': [0.5314771204835979, 0.30595097193484616, 0.6132486663869835],
  // derived (Sokoloff et al. 1998 treat it); two quadratures of |P|/p0.
  '5.exp.q0.5': [0.05322450480966189, 0.05322450480966197],
  '5.exp.q1': [0.36532598834909064, 0.3653259883490908],
  '5.exp.q2': [0.6550917472378888, 0.6550917472378895],
  // Burn 1966; Horellou & Fletcher 2014: |sinc(R l2 + D)|.
  '5.helix.D-1.5': [0.9375505544323904],
  '5.helix.D0': [0.8752966426990793],
  '5.helix.D1.5': [0.28909577187867663],
  // Tribble 1991 (form as printed); s0 over the 1/e radius of the beam.
  '5.tribble.s20.x0': [0.21101036995659714],
  '5.tribble.s20.x0.5': [0.2763976037260611],
  '5.tribble.s20.x1': [0.40212738509307144],
  '5.tribble.s20.x3': [0.7690238308411834],
  '5.tribble.s50.x0.5': [0.07991444832888903],
  '5.tribble.s50.x3': [0.4334816576381388],
  // Tribble 1991 (derived): FWHM over the 1/e radius, 2 sqrt(ln 2).
  '5.tribble.beam': [1.6651092223153954],
  // Rossetti et al. 2008; Mantovani et al. 2009: unresolved and resolved screen.
  '5.partial.f0.5.s20': [0.6055051849782986, 0.6860370363559893],
  '5.partial.f0.5.s50': [0.5000299136045145, 0.5791597179577963],
  '5.partial.f0.9.s20': [0.28990933296093735, 0.4348666654407808],
  '5.partial.f0.9.s50': [0.10005384448812638, 0.24248749232403355],
  // Sokoloff et al. 1998 (form derived): Gaussian beam, slit.
  '5.grad.g10': [0.9322593844126721, 0.9679002349403919],
  '5.grad.g30': [0.5319010825121896, 0.7327704203641363],
  // Burn 1966; Gardner & Whiteoak 1966: top-hat in lambda^2, in frequency.
  '5.bw.RM500.nu1.4': [0.9885957578382397, 0.9885958515317217],
  '5.bw.RM2000.nu1.4': [0.8267026717415803, 0.8267042485027429],
  '5.bw.RM100.nu0.15': [0.9533896285911968, 0.9533896339105086],
  // Burn 1966; Sokoloff et al. 1998: emission like B_perp^2, like B^2 B_perp^2.
  '5.wi.b1': [0.6000000000000001, 0.6521739130434784],
  '5.wi.b2': [0.27272727272727276, 0.33574007220216606],
  '5.wi.b0.5': [0.8571428571428571, 0.8702290076335879],
  // Burn 1966: rms and mean p/p0 of N cells.
  '5.N10': [0.31622776601683794, 0.28024956081989644],
  '5.N100': [0.1, 0.0886226925452758],
  '5.N1000': [0.03162277660168379, 0.028024956081989644],
  // Brentjens & de Bruyn 2005, eq. 61 (prints 2 sqrt 3); Schnitzeler et al. 2009 (3.8).
  '6.fwhm': [3.7909885340679623],
  // Brentjens & de Bruyn 2005, eq. 63 (prints sqrt 3).
  '6.chan': [1.8954942670339812],
  // Brentjens & de Bruyn 2005, eq. 62.
  '6.maxscale': [3.141592653589793],
  // Brentjens & de Bruyn 2005, eq. 61 to 63: span, 2 sqrt 3/span, 3.79/span, width, largest scale, sqrt 3/channel of the lowest, of the highest, mean lambda^2.
  '6.exp.A': [0.06740663840526132, 51.39110475011271, 56.240581399057916, 63.465788741804374, 139.8197296845728, 9881.548211581849, 78878.92660945698, 0.04493775268701182],
  '6.exp.B': [3.467419671052536, 0.9990430763421914, 1.093316902397686, 1.1368953177046013, 1.1325398104450393, 555.2320739468058, 1872.7374797087978, 4.16090355951237],
  '6.exp.C': [0.01685165960131533, 205.56441900045084, 224.96232559623166, 253.86322287429854, 559.2789187382912, 19792.018018511753, 157642.25147932683, 0.01123443348438809],
  '6.exp.array92cm': [0.2767645633130371, 12.516420359855283, 13.697521419243726, 13.804482306885607, 4.9945005640626245, 603.7872820942848, 1038.8007633605112, 0.7548120447954004],
  // derived (Dirichlet kernel): twice the value, first alias.
  '6.dirichlet': [0.4064574062498228, 0.4064574062498238, 8931.09911520528],
  // Brentjens & de Bruyn 2005, eq. 52; 3000 draws; uniform coverage.
  '6.sigphi': [0.7349211610452592, 0.7334033974510329, 0.7423074889580903],
  // Brentjens & de Bruyn 2005, eq. 53.
  '6.sigchi0': [0.04311415158251566],
  // Rice 1945: mean of P/sigma; sqrt(P0^2 + 1).
  '6.rice.0': [1.2533141373155001, 1.0],
  '6.rice.0.5': [1.3304473406107031, 1.118033988749895],
  '6.rice.1': [1.5485724605511453, 1.4142135623730951],
  '6.rice.2': [2.272383428068743, 2.23606797749979],
  '6.rice.3': [3.1725772879007166, 3.1622776601683795],
  '6.rice.4': [4.127193542536757, 4.123105625617661],
  '6.rice.5': [5.101069639492123, 5.0990195135927845],
  '6.rice.8': [8.062750166082914, 8.06225774829855],
  // Wardle & Kronberg 1974; George, Stil & Keller 2012; chance of a sample of noise, e^{-P^2/2}.
  '6.bias.3': [2.8284271247461903, 2.588435821108957, 0.011108996538242308],
  '6.bias.5': [4.898979485566356, 4.764451699828638, 3.7266531720786714e-06],
  '6.bias.8': [7.937253933193772, 7.854934754662192, 1.2664165549094176e-14],
  // Wardle & Kronberg 1974.
  '6.sigchi': [0.1],
  // Brentjens & de Bruyn 2005 (recomputed): |F| at both depths, angle of the first at the reference and without its neighbour.
  '6.two': [0.918652160765427, 0.5838042157735959, 0.7596469015326127, 0.7574775958721869],
  // 80000 draws; George, Stil & Keller 2012 print 2.3: A with <sqrt(P^2 - A)> = P0, and <P^2> - P0^2.
  '6.peakbias.5': [2.077, 3.135],
  '6.peakbias.6': [1.934, 2.954],
  '6.peakbias.8': [1.881, 2.887],
  '6.peakbias.12': [1.926, 2.928],
  '6.peakbias.20': [2.028, 3.031],
  // Krause 1990; Berkhuijsen et al. 1997.
  '10.ass': [-0.46984631039295405, -5.5511151231257815e-17, 0.49999999999999983, -1.3877787807814454e-16],
  // derived; a layer behind which a source lies, and one that emits.
  '10.amp': [70.31270335290867, 35.156351676454335],
  // Sofue et al. 1986; Krause 1990.
  '10.bss': [0.7198463103929543, 0.7499999999999999, -0.2499999999999998],
  // derived.
  '10.PI': [0.8660254037844387, 1.0, 0.8827482339886769, 1.2955222104840982],
} as const satisfies Readonly<Record<string, readonly number[]>>;

export type CheckId = keyof typeof rows;

/** The values of a row. */
export function checkRow(id: CheckId): readonly number[] {
  return rows[id];
}

/** The ids of all rows. */
export const checkIds = Object.keys(rows) as CheckId[];
