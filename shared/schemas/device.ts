import { z } from 'zod'
import { quantity } from './quantities'

export const anisotropySchema = z.discriminatedUnion('kind', [
  z.strictObject({
    kind: z.literal('effectiveField'),
    anisotropyField: quantity({ label: 'Anisotropy field', symbol: 'H_k', dimension: 'field', unit: 'mT', hint: 'Effective, shape included.' }, 1, 1e7),
  }),
  z.strictObject({
    kind: z.literal('interface'),
    interfaceAnisotropy: quantity({ label: 'Interface anisotropy', symbol: 'K_i', dimension: 'interfaceEnergy', unit: 'mJ/m2', hint: 'Shape is subtracted.' }, 0, 0.1),
  }),
  z.strictObject({
    kind: z.literal('inPlane'),
    interfaceAnisotropy: quantity({ label: 'Interface anisotropy', symbol: 'K_i', dimension: 'interfaceEnergy', unit: 'mJ/m2', hint: 'Shape is subtracted.' }, 0, 0.1),
  }),
]).meta({ description: 'effectiveField, interface: the easy axis is the normal of the film, z. inPlane: the easy axis is x, the long axis of the cell, held by shape and the in-plane uniaxial field; +x is the parallel state.' })

export const torqueSchema = z.discriminatedUnion('kind', [
  z.strictObject({
    kind: z.literal('constant'),
    efficiency: quantity({ label: 'Torque efficiency', symbol: 'η', dimension: 'ratio', unit: '1' }, 1e-3, 1),
  }),
  z.strictObject({
    kind: z.literal('symmetric'),
    polarization: quantity({ label: 'Spin polarization', symbol: 'P', dimension: 'ratio', unit: '1', hint: 'η = P/(1 + P² cos θ): symmetric junction at fixed current.' }, 1e-3, 0.99),
  }),
  z.strictObject({
    kind: z.literal('asymmetric'),
    polarization: quantity({ label: 'Spin polarization', symbol: 'P', dimension: 'ratio', unit: '1' }, 1e-3, 1),
    asymmetry: quantity({ label: 'Torque asymmetry', symbol: 'Λ', dimension: 'number', unit: '1', hint: 'η = P Λ²/(Λ² cos²(θ/2) + sin²(θ/2)).' }, 0.1, 10),
  }),
])

const strayComponent = (axis: string) => quantity({ label: `Stray field, ${axis}`, symbol: `H_s${axis}`, dimension: 'field', unit: 'mT', hint: 'Of the reference layer, beside the applied field.' }, -1e6, 1e6).optional()

const rareDevice = {
  secondDiameter: quantity({ label: 'Second diameter', symbol: 'd_y', dimension: 'length', unit: 'nm', hint: 'Of an ellipse, along y; the diameter is then its long axis, x.' }, 1e-9, 1e-6).optional(),
  shape: z.enum(['cylinder', 'ellipsoid']).optional().meta({ label: 'Shape factors of', description: 'Demagnetizing factors of the circular or elliptic cylinder (default), or of the ellipsoid with the same axes. The volume is that of the cylinder.' }),
  uniaxialField: quantity({ label: 'In-plane uniaxial field', symbol: 'H_ku', dimension: 'field', unit: 'mT', hint: 'Along x, shape not included.' }, 0, 1e6).optional(),
  strayField: z.strictObject({ x: strayComponent('x'), y: strayComponent('y'), z: strayComponent('z') }).optional().meta({ description: 'Stray field of the reference layer in A/m, added to the applied field.' }),
  fieldLikeQuadratic: quantity({ label: 'Field-like, quadratic', symbol: 'b_2', dimension: 'fieldPerSquareVolt', unit: 'mT/V2', hint: 'b_J = β a_J + b₂ V².' }, -1e7, 1e7).optional(),
  voltageAnisotropy: quantity({ label: 'Voltage-controlled anisotropy', symbol: 'ξ', dimension: 'voltageAnisotropy', unit: 'fJ/(V·m)', hint: 'ΔK_i = −ξ V/t_b, V > 0 for a write to parallel. Needs the barrier’s thickness.' }, -1e-11, 1e-11).optional(),
  barrierThickness: quantity({ label: 'Barrier thickness', symbol: 't_b', dimension: 'length', unit: 'nm' }, 1e-10, 1e-8).optional(),
  halfVoltage: quantity({ label: 'TMR halves at', symbol: 'V_half', dimension: 'voltage', unit: 'V', hint: 'TMR(V) = TMR/(1 + (V/V_half)²) at constant R_P.' }, 0.01, 100).optional(),
  pitch: quantity({ label: 'Array pitch', symbol: 'pitch', dimension: 'length', unit: 'nm', hint: 'Centre to centre; for the field of the eight neighbours.' }, 1e-9, 1e-4).optional(),
  materialTemperature: quantity({ label: 'Material values at', symbol: 'T_m', dimension: 'temperature', unit: '°C', hint: 'Temperature at which Ms, anisotropy and TMR are given; the laws below lead from it.' }, 1, 1000).optional(),
  magnetizationTemperature: quantity({ label: 'Ms vanishes at', symbol: 'T_0', dimension: 'temperature', unit: 'K', hint: 'Ms(T) ∝ 1 − (T/T_0)^(3/2).' }, 100, 5000).optional(),
  anisotropyExponent: quantity({ label: 'Exponent of anisotropy', symbol: 'n', dimension: 'number', unit: '1', hint: 'K_i ∝ Msⁿ.' }, 0, 10).optional(),
  tmrSlope: quantity({ label: 'TMR falls by', symbol: 's', dimension: 'perKelvin', unit: '%/K', hint: 'TMR(T) = TMR · (1 − s (T − T_m)).' }, 0, 0.02).optional(),
  thermalResistance: quantity({ label: 'Thermal resistance', symbol: 'R_th', dimension: 'thermalResistance', unit: 'K/µW', hint: 'ΔT = R_th · power in the junction, at once.' }, 0, 1e9).optional(),
} as const

/** One free layer and its junction. Coherent SI throughout. */
export const deviceSchema = z.strictObject({
  label: z.string().trim().min(1).max(60).meta({ label: 'Name', description: 'Name of the cell in the sentence.' }),
  damping: quantity({ label: 'Damping', symbol: 'α', dimension: 'number', unit: '1' }, 1e-4, 2),
  saturationMagnetization: quantity({ label: 'Saturation magnetization', symbol: 'Ms', dimension: 'magnetization', unit: 'kA/m' }, 1e3, 3e6),
  anisotropy: anisotropySchema,
  thickness: quantity({ label: 'Thickness', symbol: 't', dimension: 'length', unit: 'nm' }, 1e-10, 1e-7),
  diameter: quantity({ label: 'Diameter', symbol: 'd', dimension: 'length', unit: 'nm' }, 1e-9, 1e-6),
  exchangeStiffness: quantity({ label: 'Exchange stiffness', symbol: 'A', dimension: 'exchange', unit: 'pJ/m' }, 1e-13, 1e-10),
  torque: torqueSchema,
  fieldLikeRatio: quantity({ label: 'Field-like ratio', symbol: 'β', dimension: 'number', unit: '1', hint: 'b_J = β a_J.' }, -5, 5).default(0),
  referenceTilt: quantity({ label: 'Reference tilt', symbol: 'p', dimension: 'angle', unit: '°', hint: 'Angle of the reference layer from the easy axis: from +z towards +x, or from +x towards +z.' }, 0, Math.PI / 2).default(0),
  resistanceArea: quantity({ label: 'Resistance–area', symbol: 'RA', dimension: 'resistanceArea', unit: 'Ω·µm2', hint: 'In the parallel state.' }, 1e-14, 1e-8),
  tunnelMagnetoresistance: quantity({ label: 'TMR', dimension: 'ratio', unit: '%', hint: '(R_AP − R_P)/R_P, at low voltage.' }, 0, 20),
  ...rareDevice,
})

/** Fields of a device that most leave out: an absent one takes no part. */
export const RARE_DEVICE_FIELDS = Object.keys(rareDevice) as readonly (keyof typeof rareDevice)[]

export type Anisotropy = z.infer<typeof anisotropySchema>
export type Torque = z.infer<typeof torqueSchema>
export type Device = z.infer<typeof deviceSchema>
