/** Where a keyword of a conjunction message stands: in the part about the encounter or in that of each object. */
export type MessagePart = 'message' | 'object';

/** A keyword of the conjunction data message. */
export type MessageKeyword = {
  readonly name: string;
  readonly part: MessagePart;
  /** `''` where there is none. */
  readonly unit: string;
  readonly obligatory: boolean;
};

const COVARIANCE_AXES = ['R', 'T', 'N', 'RDOT', 'TDOT', 'NDOT'] as const;
const COVARIANCE_UNITS = ['m**2', 'm**2/s', 'm**2/s**2'] as const;

/** The terms of a covariance in the order of the standard: the lower triangle of R, T, N and their rates, row by row. */
export const COVARIANCE_KEYWORDS = COVARIANCE_AXES.flatMap((rowAxis, row) =>
  COVARIANCE_AXES.slice(0, row + 1).map((columnAxis, column) => ({
    name: `C${rowAxis}_${columnAxis}`,
    row,
    column,
    unit: COVARIANCE_UNITS[(row > 2 ? 1 : 0) + (column > 2 ? 1 : 0)],
  })),
);

/** The keywords of CCSDS 508.0-B-1, tables 3-1 to 3-4, in their order. */
export const CONJUNCTION_MESSAGE_KEYWORDS: readonly MessageKeyword[] = [
  obligatory('message', 'CCSDS_CDM_VERS'),
  obligatory('message', 'CREATION_DATE'),
  obligatory('message', 'ORIGINATOR'),
  optional('message', 'MESSAGE_FOR'),
  obligatory('message', 'MESSAGE_ID'),
  obligatory('message', 'TCA'),
  obligatory('message', 'MISS_DISTANCE', 'm'),
  optional('message', 'RELATIVE_SPEED', 'm/s'),
  optional('message', 'RELATIVE_POSITION_R', 'm'),
  optional('message', 'RELATIVE_POSITION_T', 'm'),
  optional('message', 'RELATIVE_POSITION_N', 'm'),
  optional('message', 'RELATIVE_VELOCITY_R', 'm/s'),
  optional('message', 'RELATIVE_VELOCITY_T', 'm/s'),
  optional('message', 'RELATIVE_VELOCITY_N', 'm/s'),
  optional('message', 'START_SCREEN_PERIOD'),
  optional('message', 'STOP_SCREEN_PERIOD'),
  optional('message', 'SCREEN_VOLUME_FRAME'),
  optional('message', 'SCREEN_VOLUME_SHAPE'),
  optional('message', 'SCREEN_VOLUME_X', 'm'),
  optional('message', 'SCREEN_VOLUME_Y', 'm'),
  optional('message', 'SCREEN_VOLUME_Z', 'm'),
  optional('message', 'SCREEN_ENTRY_TIME'),
  optional('message', 'SCREEN_EXIT_TIME'),
  optional('message', 'COLLISION_PROBABILITY'),
  optional('message', 'COLLISION_PROBABILITY_METHOD'),
  obligatory('object', 'OBJECT'),
  obligatory('object', 'OBJECT_DESIGNATOR'),
  obligatory('object', 'CATALOG_NAME'),
  obligatory('object', 'OBJECT_NAME'),
  obligatory('object', 'INTERNATIONAL_DESIGNATOR'),
  optional('object', 'OBJECT_TYPE'),
  optional('object', 'OPERATOR_CONTACT_POSITION'),
  optional('object', 'OPERATOR_ORGANIZATION'),
  optional('object', 'OPERATOR_PHONE'),
  optional('object', 'OPERATOR_EMAIL'),
  obligatory('object', 'EPHEMERIS_NAME'),
  obligatory('object', 'COVARIANCE_METHOD'),
  obligatory('object', 'MANEUVERABLE'),
  optional('object', 'ORBIT_CENTER'),
  obligatory('object', 'REF_FRAME'),
  optional('object', 'GRAVITY_MODEL'),
  optional('object', 'ATMOSPHERIC_MODEL'),
  optional('object', 'N_BODY_PERTURBATIONS'),
  optional('object', 'SOLAR_RAD_PRESSURE'),
  optional('object', 'EARTH_TIDES'),
  optional('object', 'INTRACK_THRUST'),
  optional('object', 'TIME_LASTOB_START'),
  optional('object', 'TIME_LASTOB_END'),
  optional('object', 'RECOMMENDED_OD_SPAN', 'd'),
  optional('object', 'ACTUAL_OD_SPAN', 'd'),
  optional('object', 'OBS_AVAILABLE'),
  optional('object', 'OBS_USED'),
  optional('object', 'TRACKS_AVAILABLE'),
  optional('object', 'TRACKS_USED'),
  optional('object', 'RESIDUALS_ACCEPTED', '%'),
  optional('object', 'WEIGHTED_RMS'),
  optional('object', 'AREA_PC', 'm**2'),
  optional('object', 'AREA_DRG', 'm**2'),
  optional('object', 'AREA_SRP', 'm**2'),
  optional('object', 'MASS', 'kg'),
  optional('object', 'CD_AREA_OVER_MASS', 'm**2/kg'),
  optional('object', 'CR_AREA_OVER_MASS', 'm**2/kg'),
  optional('object', 'THRUST_ACCELERATION', 'm/s**2'),
  optional('object', 'SEDR', 'W/kg'),
  obligatory('object', 'X', 'km'),
  obligatory('object', 'Y', 'km'),
  obligatory('object', 'Z', 'km'),
  obligatory('object', 'X_DOT', 'km/s'),
  obligatory('object', 'Y_DOT', 'km/s'),
  obligatory('object', 'Z_DOT', 'km/s'),
  ...COVARIANCE_KEYWORDS.map(({ name, unit }) => obligatory('object', name, unit)),
];

function obligatory(part: MessagePart, name: string, unit = ''): MessageKeyword {
  return { name, part, unit, obligatory: true };
}

function optional(part: MessagePart, name: string, unit = ''): MessageKeyword {
  return { name, part, unit, obligatory: false };
}
