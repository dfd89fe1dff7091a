import { referenceKernel } from '../../src/linalg/reference/reference-kernel.js';
import { spectralKernelSuite } from './spectral-kernel.suite.js';

spectralKernelSuite(referenceKernel.name, referenceKernel);
